import { copyFile, open, rename, rm, stat } from 'node:fs/promises'

/** What was there before stays beside it, for going back by hand. */
export const previousOf = (path: string): string => `${path}.previous`

/** Beside the file it is to replace, so that a rename can; ends in .mjs, as Node tells modules by that. */
const stagedOf = (path: string): string => `${path.replace(/\.mjs$/, '')}.next.mjs`

/** Writes the whole file to disk, with the rights of the one it is to replace. @returns where */
export async function stageFile(path: string, bytes: Uint8Array): Promise<string> {
  const staged = stagedOf(path)
  const { mode } = await stat(path)
  await rm(staged, { force: true })
  const file = await open(staged, 'wx', mode & 0o777)
  try {
    await file.writeFile(bytes)
    await file.chmod(mode & 0o777)
    await file.sync()
  } finally {
    await file.close()
  }
  return staged
}

export const unstageFile = (staged: string): Promise<void> => rm(staged, { force: true })

/** At every moment there is a whole file at `path`. */
export async function replaceFile(path: string, staged: string): Promise<void> {
  await copyFile(path, previousOf(path))
  await rename(staged, path)
}
