import fc from 'fast-check'

/** Properties are tried on the same cases everywhere: a new one is found where someone looks for it (another seed here). */
const SEED = 20_261_201

fc.configureGlobal({ seed: SEED })
