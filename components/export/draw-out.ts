import { type DrawingFile, drawingFile, familiesOf, styleAttributes } from '@/lib/face/drawing-file'

/** Marks of sides beside a drawing are svg elements as well, so what is drawn says that it is. */
export const DRAWN = 'svg[data-drawn]'

/**
 * The drawn svg elements below `frame` as one file: looks and fonts written into it, on the day sheet whatever the page shows.
 * The sheet is turned for as long as the looks are read, which no frame is painted in.
 */
export async function drawOut(
  frame: HTMLElement,
  said: Pick<DrawingFile, 'title' | 'caption'>,
): Promise<ReturnType<typeof drawingFile>> {
  const families = new Set<string>()
  const root = document.documentElement
  const sheet = root.dataset.sheet
  root.dataset.sheet = 'day'
  const drawings = [...frame.querySelectorAll<SVGSVGElement>(DRAWN)]
  const layers = drawings.map((svg) => layerOf(svg, families))
  const page = getComputedStyle(root)
  const [background, ink] = [page.getPropertyValue('--sheet').trim(), page.getPropertyValue('--ink').trim()]
  if (sheet === undefined) delete root.dataset.sheet
  else root.dataset.sheet = sheet
  const { width, height } = drawings[0]?.viewBox.baseVal ?? { width: 0, height: 0 }
  return drawingFile({ width, height, layers, background, ink, fonts: await fontRules(families), ...said })
}

function layerOf(svg: SVGSVGElement, families: Set<string>): string {
  const copy = svg.cloneNode(true) as SVGSVGElement
  const originals = [...svg.querySelectorAll('*')]
  for (const [at, element] of [...copy.querySelectorAll('*')].entries()) {
    const original = originals[at]
    if (!original) continue
    const style = getComputedStyle(original)
    const isText = element.tagName === 'text' || element.tagName === 'tspan'
    if (isText) for (const family of familiesOf(style.fontFamily)) families.add(family)
    element.removeAttribute('class')
    element.removeAttribute('style')
    if (element.tagName === 'g') {
      // What is drawn says its own look; a group's opacity is the one thing that does not come down to it.
      if (style.opacity !== '1') element.setAttribute('opacity', style.opacity)
      continue
    }
    for (const [name, value] of styleAttributes(isText, (name) => style.getPropertyValue(name)))
      element.setAttribute(name, value)
  }
  return new XMLSerializer().serializeToString(copy).replace(/^<svg[^>]*>|<\/svg>$/g, '')
}

/** The page's rules for these families, each with its font as data. One that cannot be had is left to the reader's own. */
async function fontRules(families: ReadonlySet<string>): Promise<string> {
  const rules = [...document.styleSheets]
    .flatMap((sheet) => {
      try {
        return [...sheet.cssRules].map((rule) => ({ rule, base: sheet.href ?? document.baseURI }))
      } catch {
        return []
      }
    })
    .flatMap(({ rule, base }) => (rule instanceof CSSFontFaceRule ? [{ rule, base }] : []))
    .filter(({ rule }) =>
      familiesOf(rule.style.getPropertyValue('font-family')).some((name) => families.has(name)),
    )
  const written = await Promise.all(rules.map(({ rule, base }) => withFont(rule.cssText, base)))
  return written.join('\n')
}

async function withFont(rule: string, base: string): Promise<string> {
  const found = /url\((["']?)([^"')]+)\1\)/.exec(rule)
  if (!found?.[2]) return ''
  try {
    const response = await fetch(new URL(found[2], base))
    if (!response.ok) return ''
    return rule.replace(found[0], `url(${await dataUrl(await response.blob())})`)
  } catch {
    return ''
  }
}

function dataUrl(blob: Blob): Promise<string> {
  return new Promise((resolve, reject) => {
    const reader = new FileReader()
    reader.onload = () => resolve(String(reader.result))
    reader.onerror = () => reject(reader.error)
    reader.readAsDataURL(blob)
  })
}

const PNG_SCALE = 2

/** Twice the size on screen. */
export async function toPng({ svg, width, height }: ReturnType<typeof drawingFile>): Promise<Blob> {
  const image = new Image(width, height)
  const url = URL.createObjectURL(new Blob([svg], { type: 'image/svg+xml' }))
  try {
    image.src = url
    await image.decode()
    const canvas = document.createElement('canvas')
    canvas.width = width * PNG_SCALE
    canvas.height = height * PNG_SCALE
    const context = canvas.getContext('2d')
    if (!context) throw new Error('This browser cannot draw a picture.')
    context.drawImage(image, 0, 0, canvas.width, canvas.height)
    const blob = await new Promise<Blob | null>((resolve) => canvas.toBlob(resolve, 'image/png'))
    if (!blob) throw new Error('This browser cannot draw a picture of that size.')
    return blob
  } finally {
    URL.revokeObjectURL(url)
  }
}
