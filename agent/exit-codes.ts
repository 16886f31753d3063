/** What the command's exit status says. Documented for service units and scripts; never renumbered. */
export const EXIT = {
  ok: 0,
  /** A fault of the program itself. */
  unexpected: 1,
  /** Unknown command or flag, or a value that cannot be right. */
  usage: 2,
  /** The configuration is missing, unreadable, not one of this program or cannot be written. The message says which. */
  config: 3,
  /** The collector refused: code used up or expired, agent revoked. The message says which. */
  refused: 4,
  /** The collector did not answer, or something else did. Worth trying again. */
  unreachable: 5,
  /** The address to listen on cannot be taken. */
  listen: 6,
  /** The configuration is there already; `enrol` does not overwrite a key. */
  alreadyEnrolled: 7,
} as const

export type ExitCode = (typeof EXIT)[keyof typeof EXIT]
