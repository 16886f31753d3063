/** Hard limits of what crosses the wire. Whatever is larger is refused before it is looked at. */

export const MAX_COLONIES = 64
/** z̄ of a node, walkers: its square, summed over links, must stay exact. */
export const MAX_MEAN_OCCUPANCY = 2 ** 20
/** Orders carry lists of refused agents; a rehearsal may exclude a tenth of ten thousand of them. */
export const MAX_ORDERS_BYTES = 256 * 1024
export const MAX_FRAME_BYTES = MAX_ORDERS_BYTES + 16 * 1024
/** Hello and proof: an end that sends a larger message before it has proved itself is closed with `too-large`. */
export const MAX_HANDSHAKE_BYTES = 8 * 1024
export const MAX_PASS_CHARS = 4 * 1024
export const MAX_LABELS = 32
export const MAX_LABEL_CHARS = 100
export const MAX_THRESHOLDS = 64
export const MAX_REFUSED = 2_000
export const MAX_REPORT_LINKS = 4_096
export const MAX_REPORT_BYTES = 1024 * 1024
/** A report that neighbours carry; longer ones leave their link list out. */
export const MAX_RELAYED_REPORT_BYTES = 64 * 1024
/** Relayed reports delivered with one report of one's own. */
export const MAX_RELAYED = 32
/** Agents that nobody keeps a link to, in orders. */
export const MAX_SHUT = 2_000
export const MAX_COMPLAINTS = 64
/** Masked rounds that orders announce, or a report carries; entries of one. */
export const MAX_ROUNDS = 16
export const MAX_ROUND_ENTRIES = 5_000
