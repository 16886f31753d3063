/** What the command's exit status says. Documented for service units and scripts; never renumbered. */
export const EXIT = {
  ok: 0,
  /** A fault of the program itself. */
  unexpected: 1,
  /** Unknown command or flag, or a value that cannot be right. */
  usage: 2,
  /** The configuration is missing, unreadable, not one of this program or cannot be written. The message says which. */
  config: 3,
  /** The collector refused: code used up or expired, key copied from another machine. The message says which. */
  refused: 4,
  /** The collector did not answer, or something else did. Worth trying again. */
  unreachable: 5,
  /** The address to listen on cannot be taken. */
  listen: 6,
  /** The configuration is another agent's or another collector's; `enrol` does not overwrite a key. */
  alreadyEnrolled: 7,
  /** `check` found something that would go wrong. */
  checkFailed: 8,
  /** The agent has left, was retired or revoked: starting it again does not help. */
  ended: 9,
  /** The program's file was replaced by an offered version: start it again. */
  upgraded: 10,
} as const

export type ExitCode = (typeof EXIT)[keyof typeof EXIT]
