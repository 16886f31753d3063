/** What the stand-ins were sent, in memory only, the newest so many of each. */
export const KEPT_MOST = 200

export interface KeptMail {
  at: string
  from: string
  to: string[]
  subject: string
  messageId: string | null
  references: string[]
  text: string
  html: string
}

export interface KeptSms {
  at: string
  from: string
  to: string
  text: string
}

export interface KeptCall {
  at: string
  path: string
  headers: Record<string, string>
  body: string
  /** What was answered. */
  status: number
}

export interface Kept {
  mails: KeptMail[]
  texts: KeptSms[]
  calls: KeptCall[]
}

export const nothingKept = (): Kept => ({ mails: [], texts: [], calls: [] })

/** Newest first. */
export function keep<T>(list: T[], entry: T): void {
  list.unshift(entry)
  list.length = Math.min(list.length, KEPT_MOST)
}
