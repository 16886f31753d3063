/** So many rehearsals may run in one overlay at once: each has four colonies of its own. */
export const MOST_REHEARSALS = 3
