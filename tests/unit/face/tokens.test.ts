import { readFileSync } from 'node:fs'
import { describe, expect, it } from 'vitest'

const css = readFileSync(new URL('../../../app/globals.css', import.meta.url), 'utf8').replaceAll('"', "'")

/** Custom properties of the first block after a selector. */
function tokens(selector: string): Record<string, string> {
  const from = css.indexOf(`${selector} {`)
  expect(from).toBeGreaterThanOrEqual(0)
  const block = css.slice(from, css.indexOf('}', from))
  return Object.fromEntries([...block.matchAll(/--([a-z-]+):\s*(#[0-9a-f]{6,8})/g)].map((m) => [m[1], m[2]]))
}

/** WCAG 2.2, relative luminance and contrast ratio. */
function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((i) => {
    const c = Number.parseInt(hex.slice(i, i + 2), 16) / 255
    return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4
  })
  return 0.2126 * (r ?? 0) + 0.7152 * (g ?? 0) + 0.0722 * (b ?? 0)
}

function contrast(p: string, q: string): number {
  const [dark, light] = [luminance(p), luminance(q)].sort((a, b) => a - b)
  return ((light ?? 0) + 0.05) / ((dark ?? 0) + 0.05)
}

const sheets = { day: tokens(':root'), night: tokens(":root[data-sheet='night']") }

describe('colours of the sheet', () => {
  it('are the same at night whether chosen or following the system', () => {
    expect(tokens(":root:not([data-sheet='day'])")).toEqual(sheets.night)
    expect(Object.keys(sheets.day).sort()).toEqual(Object.keys(sheets.night).sort())
  })

  for (const [name, sheet] of Object.entries(sheets)) {
    for (const ground of ['paper', 'sheet']) {
      it(`let text be read on ${ground} by ${name}: 4.5 to 1`, () => {
        for (const text of ['ink', 'ink-soft', 'side-a', 'side-b', 'vermilion']) {
          expect({ text, ratio: contrast(sheet[text] ?? '', sheet[ground] ?? '') }).toMatchObject({
            ratio: expect.toSatisfy((r: number) => r >= 4.5),
          })
        }
      })

      it(`let the edges of controls be seen on ${ground} by ${name}: 3 to 1`, () => {
        expect(contrast(sheet.edge ?? '', sheet[ground] ?? '')).toBeGreaterThanOrEqual(3)
      })
    }
  }
})
