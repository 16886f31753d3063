/** First byte of every message on a link. Those after the frame are of version 2. */
export const MESSAGE_KIND = { hello: 1, proof: 2, frame: 3, pass: 4, relay: 5, relayReply: 6 } as const

/** Versions of the link protocol this program speaks, best first. */
export const LINK_VERSIONS = [2, 1] as const
/** Frames are of the version their link has agreed on; this is the newest. */
export const FRAME_VERSION = 2
