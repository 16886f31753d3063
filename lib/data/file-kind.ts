import { fileTypeFromBuffer } from 'file-type'

interface Kind {
  mediaType: string
  /** The first is added where the name has none. */
  endings: readonly [string, ...string[]]
}

const RECOGNISED: readonly Kind[] = [
  { mediaType: 'image/png', endings: ['png'] },
  { mediaType: 'image/jpeg', endings: ['jpg', 'jpeg'] },
  { mediaType: 'image/gif', endings: ['gif'] },
  { mediaType: 'image/webp', endings: ['webp'] },
  { mediaType: 'application/pdf', endings: ['pdf'] },
]
const TEXT: Kind = { mediaType: 'text/plain', endings: ['txt', 'log', 'md'] }
const CSV: Kind = { mediaType: 'text/csv', endings: ['csv'] }
const JSON_KIND: Kind = { mediaType: 'application/json', endings: ['json'] }

export const KEPT_KINDS = 'PNG, JPEG, GIF, WebP, PDF, plain text, CSV and JSON'
export const KEPT_ENDINGS = [...RECOGNISED, TEXT, CSV, JSON_KIND].flatMap(({ endings }) => endings)

export type FileKind = { ok: true; name: string; mediaType: string } | { ok: false; because: string }

/**
 * What a file is by its content, and a name that says the same. What calls itself otherwise is refused: whoever opens it
 * later goes by the name.
 */
export async function fileKind(givenName: string, bytes: Uint8Array): Promise<FileKind> {
  const name = safeFileName(givenName)
  const ending = /\.([a-z0-9]{1,8})$/i.exec(name)?.[1]?.toLowerCase() ?? null
  const found = await kindOf(bytes, ending)
  if (found === null)
    return { ok: false, because: `Kept are ${KEPT_KINDS}; by its content this is none of them.` }
  if (ending === null) return { ok: true, name: `${name}.${found.endings[0]}`, mediaType: found.mediaType }
  if (found.endings.includes(ending)) return { ok: true, name, mediaType: found.mediaType }
  return {
    ok: false,
    because: `The name ends in .${ending}, but the content is ${found.mediaType}. Give it the ending .${found.endings[0]} if that is what it is.`,
  }
}

async function kindOf(bytes: Uint8Array, ending: string | null): Promise<Kind | null> {
  const type = await fileTypeFromBuffer(bytes)
  if (type) return RECOGNISED.find(({ mediaType }) => mediaType === type.mime) ?? null
  const text = plainText(bytes)
  if (text === null) return null
  if (ending === 'csv') return CSV
  if (ending === 'json') return isJson(text) ? JSON_KIND : null
  return TEXT
}

/** Well-formed UTF-8 without control characters other than tabs and line ends; null for anything else. */
function plainText(bytes: Uint8Array): string | null {
  try {
    const text = new TextDecoder('utf-8', { fatal: true }).decode(bytes)
    // biome-ignore lint/suspicious/noControlCharactersInRegex: these are what is looked for
    return /[\u0000-\u0008\u000b\u000e-\u001f\u007f]/.test(text) ? null : text
  } catch {
    return null
  }
}

function isJson(text: string): boolean {
  try {
    JSON.parse(text)
    return true
  } catch {
    return false
  }
}

const NAME_MOST = 100

/** The last part of a path, without what a shell, a header or a reader could be misled by. */
export function safeFileName(given: string): string {
  const last = given.normalize('NFC').split(/[/\\]/).at(-1) ?? ''
  // Controls, and the marks that turn the direction of writing so that "gpj.exe" reads "exe.jpg".
  const plain = last
    .replace(/[\p{C}\p{Zl}\p{Zp}]/gu, '')
    .replace(/["<>:|?*;%]/g, '_')
    .replace(/^[.\s]+|[.\s]+$/g, '')
  if (plain.length <= NAME_MOST) return plain || 'file'
  const ending = /\.[a-z0-9]{1,8}$/i.exec(plain)?.[0] ?? ''
  return `${[...plain].slice(0, NAME_MOST - ending.length).join('')}${ending}`
}
