import { escapeXml } from '@/lib/export'

/** What of an element's look is written into the file, where no style sheet goes along. */
export const KEPT_STYLES = [
  'fill',
  'stroke',
  'stroke-width',
  'stroke-dasharray',
  'stroke-linecap',
  'stroke-linejoin',
  'paint-order',
  'opacity',
  'font-family',
  'font-size',
  'font-weight',
  'text-anchor',
  'letter-spacing',
] as const

/** What browsers say of these where nothing is set: left out, so that files stay small. */
const UNSET: Record<string, string> = {
  stroke: 'none',
  'stroke-width': '1px',
  'stroke-dasharray': 'none',
  'stroke-linecap': 'butt',
  'stroke-linejoin': 'miter',
  'paint-order': 'normal',
  opacity: '1',
  'text-anchor': 'start',
  'letter-spacing': 'normal',
}
const TEXT_ONLY = new Set(['font-family', 'font-size', 'font-weight', 'text-anchor', 'letter-spacing'])

/** The attributes that say an element's look. */
export function styleAttributes(isText: boolean, lookUp: (style: string) => string): [string, string][] {
  return KEPT_STYLES.flatMap((style): [string, string][] => {
    if (TEXT_ONLY.has(style) && !isText) return []
    const value = lookUp(style)
    return value === '' || UNSET[style] === value ? [] : [[style, value]]
  })
}

export interface DrawingFile {
  width: number
  height: number
  /** One for each layer, the lowest first: what stands in its svg element. */
  layers: readonly string[]
  background: string
  ink: string
  /** @font-face rules with the fonts in them. */
  fonts: string
  title: string
  /** Stands below the drawing: whose it is and of when. */
  caption: string
}

const MARGIN = 16
const CAPTION = 26

/** A whole SVG file. */
export function drawingFile(file: DrawingFile): { svg: string; width: number; height: number } {
  const width = file.width + 2 * MARGIN
  const height = file.height + 2 * MARGIN + CAPTION
  const svg = [
    `<svg xmlns="http://www.w3.org/2000/svg" width="${width}" height="${height}" viewBox="0 0 ${width} ${height}">`,
    `<title>${escapeXml(file.title)}</title>`,
    file.fonts === '' ? '' : `<style>${escapeXml(file.fonts)}</style>`,
    `<rect width="${width}" height="${height}" fill="${escapeXml(file.background)}"/>`,
    ...file.layers.map((layer) => `<g transform="translate(${MARGIN} ${MARGIN})">${layer}</g>`),
    `<text x="${MARGIN}" y="${height - MARGIN}" fill="${escapeXml(file.ink)}" font-family="sans-serif" font-size="13">${escapeXml(file.caption)}</text>`,
    '</svg>',
  ].join('')
  return { svg, width, height }
}

/** Families of a font-family list, without quotes. */
export function familiesOf(list: string): string[] {
  return list.split(',').map((family) => family.trim().replace(/^["']|["']$/g, ''))
}
