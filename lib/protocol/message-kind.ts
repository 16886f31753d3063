/** First byte of every message on a link. */
export const MESSAGE_KIND = { hello: 1, proof: 2, frame: 3, pass: 4, relay: 5, relayReply: 6 } as const

/** Versions of the link protocol this program speaks, best first. */
export const LINK_VERSIONS = [1] as const
export const FRAME_VERSION = 1
