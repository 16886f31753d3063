import { hash, verify } from '@node-rs/argon2'

/** Argon2id with OWASP's minimum of 19 MiB, 2 passes, 1 lane (Password Storage Cheat Sheet, from memory). */
const OPTIONS = { memoryCost: 19_456, timeCost: 2, parallelism: 1 }

export function hashPassword(password: string): Promise<string> {
  return hash(password, OPTIONS)
}

let standIn: Promise<string> | undefined

/** Takes as long for an unknown person or one without a password as for a wrong password. */
export async function verifyPassword(
  passwordHash: string | null | undefined,
  password: string,
): Promise<boolean> {
  standIn ??= hashPassword('nobody has this password')
  const matches = await verify(passwordHash ?? (await standIn), password)
  return matches && passwordHash != null
}
