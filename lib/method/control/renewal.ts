/** The oldest colony is seeded anew this often, so that a change of cut finds one that is not set in the old one. */
export const RENEWAL_INTERVALS = 17
