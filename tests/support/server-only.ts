// Stands in for the package that refuses to load outside a server bundle.
export {}
