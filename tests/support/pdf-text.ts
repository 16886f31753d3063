import { inflateSync } from 'node:zlib'

/**
 * The text of a PDF in the standard fonts: strings in text operators (ISO 32000-2, 9.4.3), hexadecimal and in
 * Windows-1252. Each text operator is a line.
 */
export function pdfText(bytes: Uint8Array): string {
  const source = inflated(Buffer.from(bytes).toString('latin1'))
  const shown = source.matchAll(/\[((?:<[0-9a-fA-F]*>|[-\d.\s])*)\]\s*TJ/g)
  return [...shown]
    .map(([, array = '']) =>
      [...array.matchAll(/<([0-9a-fA-F]*)>/g)]
        .map(([, hex = '']) => decoded(Buffer.from(hex, 'hex')))
        .join(''),
    )
    .join('\n')
}

/** Compressed streams as what they hold (ISO 32000-2, 7.3.8 and 7.4.4), with lengths as pdfkit writes them. */
function inflated(source: string): string {
  const compressed = /\/Length (\d+)\s+\/Filter \/FlateDecode\s*>>\s*stream\n/g
  const texts = [...source.matchAll(compressed)].map(({ index, 0: head, 1: length }) => {
    const start = index + head.length
    return inflateSync(Buffer.from(source.slice(start, start + Number(length)), 'latin1')).toString('latin1')
  })
  return [source, ...texts].join('\n')
}

/** Where Windows-1252 is not Latin-1: 0x80 to 0x9f (Unicode mapping table CP1252.TXT). Node 20's decoder takes it for Latin-1. */
const BETWEEN = '€\u0081‚ƒ„…†‡ˆ‰Š‹Œ\u008dŽ\u008f\u0090‘’“”•–—˜™š›œ\u009džŸ'

function decoded(bytes: Buffer): string {
  return [...bytes.toString('latin1')].map((char) => BETWEEN[char.charCodeAt(0) - 0x80] ?? char).join('')
}
