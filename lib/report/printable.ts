/**
 * The fonts that every PDF reader has know Windows-1252 and no more. pdfkit 0.20 cannot embed the ones in fonts/: its
 * fontkit 2 does not find the outlines of WOFF2 files when it makes a subset (RangeError in TTFSubset). So what
 * they lack is written another way, and what cannot be is shown as "?".
 */
const OTHERWISE: Readonly<Record<string, string>> = {
  λ: 'lambda-',
  '₂': '2',
  '₃': '3',
  '−': '-',
  '→': '->',
  '≤': 'at most ',
  '≥': 'at least ',
  '\u202f': '\u00a0',
  '\u2009': ' ',
}
/** Windows-1252 beyond Latin-1. */
const MORE = new Set('€‚ƒ„…†‡ˆ‰Š‹ŒŽ‘’“”•–—˜™š›œžŸ')

export function printable(text: string): string {
  return [...text.normalize('NFC')].map(printableChar).join('')
}

function printableChar(char: string): string {
  if (isKnown(char)) return char
  const other = OTHERWISE[char]
  if (other !== undefined) return other
  const plain = char.normalize('NFKD').replace(/\p{M}/gu, '')
  return plain !== '' && [...plain].every(isKnown) ? plain : '?'
}

function isKnown(char: string): boolean {
  const code = char.codePointAt(0) ?? 0
  return char === '\n' || (code >= 0x20 && code < 0x7f) || (code >= 0xa0 && code <= 0xff) || MORE.has(char)
}
