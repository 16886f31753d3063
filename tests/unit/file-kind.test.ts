import { describe, expect, it } from 'vitest'
import { fileKind, safeFileName } from '@/lib/data/file-kind'
import { attachment } from '@/lib/http/attachment'

const text = (content: string) => new TextEncoder().encode(content)
const bytes = (...parts: (string | number[])[]) =>
  Uint8Array.from(
    parts.flatMap((part) => (typeof part === 'string' ? [...part].map((c) => c.charCodeAt(0)) : part)),
  )
// Heads as their specifications have them: PNG 3rd edition 5.2 and 11.2.1, GIF89a, RFC 9649 (WebP), ISO 32000-2 7.5.2, JFIF 1.02.
const PNG = bytes(
  [0x89],
  'PNG\r\n',
  [0x1a, 0x0a, 0, 0, 0, 13],
  'IHDR',
  [0, 0, 0, 1, 0, 0, 0, 1, 8, 0, 0, 0, 0, 0, 0, 0, 0],
  [0, 0, 0, 0],
  'IDAT',
  [0, 0, 0, 0],
)
const GIF = bytes('GIF89a', [1, 0, 1, 0, 0, 0, 0, 0x3b])
const PDF = bytes('%PDF-1.7\n%%EOF\n')
const JPEG = bytes([0xff, 0xd8, 0xff, 0xe0, 0, 16], 'JFIF', [0, 1, 2, 0, 0, 1, 0, 1, 0, 0, 0xff, 0xd9])
const WEBP = bytes(
  'RIFF',
  [26, 0, 0, 0],
  'WEBPVP8 ',
  [14, 0, 0, 0],
  [0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0],
)
const ZIP = bytes(
  'PK',
  [3, 4, 20, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 1, 0, 0, 0],
  'a',
)
const GZIP = bytes([0x1f, 0x8b, 8, 0, 0, 0, 0, 0, 0, 3])

describe('a file', () => {
  it.each<[string, Uint8Array, string, string]>([
    ['Screen.PNG', PNG, 'Screen.PNG', 'image/png'],
    ['scope.gif', GIF, 'scope.gif', 'image/gif'],
    ['photo.jpeg', JPEG, 'photo.jpeg', 'image/jpeg'],
    ['photo.webp', WEBP, 'photo.webp', 'image/webp'],
    ['letter.pdf', PDF, 'letter.pdf', 'application/pdf'],
    ['tar-01.log', text('10:02 link lost\r\n\tgul-04'), 'tar-01.log', 'text/plain'],
    ['links.csv', text('source,target\ntar-01,gul-04\n'), 'links.csv', 'text/csv'],
    ['state.json', text('{"links": 3}'), 'state.json', 'application/json'],
    ['photo', JPEG, 'photo.jpg', 'image/jpeg'],
    ['Pegelstände Ærø.txt', text('Flut 3,2 m – Ebbe 0,4 m'), 'Pegelstände Ærø.txt', 'text/plain'],
  ])('%s is kept as what it is', async (name, content, kept, mediaType) => {
    expect(await fileKind(name, content)).toEqual({ ok: true, name: kept, mediaType })
  })

  it.each<[string, string, Uint8Array, RegExp]>([
    [
      'HTML that calls itself a picture',
      'chart.png',
      text('<html><script>alert(1)</script>'),
      /ends in \.png/,
    ],
    ['HTML under its own name', 'page.html', text('<html></html>'), /ends in \.html/],
    [
      'a drawing with scripts in it',
      'chart.svg',
      text('<svg xmlns="http://www.w3.org/2000/svg"/>'),
      /ends in \.svg|none of them/,
    ],
    ['XML', 'chart.xml', text('<?xml version="1.0"?><a/>'), /none of them/],
    ['a picture that calls itself a program', 'photo.jpg.exe', JPEG, /ends in \.exe/],
    ['a picture that calls itself another', 'photo.png', JPEG, /content is image\/jpeg/],
    ['a packed folder', 'all.zip', ZIP, /none of them/],
    ['packed text', 'all.log', GZIP, /none of them/],
    ['a program', 'tool.txt', bytes([0x7f], 'ELF', [2, 1, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0]), /none of them/],
    ['text that is not UTF-8', 'old.txt', bytes([0x50, 0xe4, 0x67]), /none of them/],
    ['text with a NUL', 'old.txt', bytes('a', [0], 'b'), /none of them/],
    ['JSON that is none', 'state.json', text('{"links": '), /none of them/],
  ])('%s is refused', async (_what, name, content, because) => {
    expect(await fileKind(name, content)).toEqual({ ok: false, because: expect.stringMatching(because) })
  })
})

describe('a file name', () => {
  it.each([
    ['../../etc/passwd', 'passwd'],
    ['C:\\tides\\a.txt', 'a.txt'],
    ['a\u202egpj.txt', 'agpj.txt'],
    ['a\r\nset-cookie: x.txt', 'aset-cookie_ x.txt'],
    ['"quoted".csv', '_quoted_.csv'],
    ['...', 'file'],
    ['.bashrc', 'bashrc'],
    [`${'x'.repeat(300)}.json`, `${'x'.repeat(95)}.json`],
  ])('%j becomes %j', (given, safe) => expect(safeFileName(given)).toBe(safe))

  it('goes out in ASCII and as it is, and the file is saved, not shown', () => {
    const { headers } = attachment({ name: 'Ærø "1".txt', mediaType: 'text/plain', bytes: text('x') })
    expect(Object.fromEntries(headers)).toEqual({
      'cache-control': 'private, no-store',
      'content-disposition': `attachment; filename="_r_ _1_.txt"; filename*=UTF-8''%C3%86r%C3%B8%20%221%22.txt`,
      'content-length': '1',
      'content-security-policy': "default-src 'none'; frame-ancestors 'none'; sandbox",
      'content-type': 'text/plain; charset=utf-8',
      'x-content-type-options': 'nosniff',
    })
  })
})
