import type { Locator, Page } from 'playwright-core'
import type { Reading } from '@/lib/data/dto'

export async function heading(on: Page, name: string): Promise<void> {
  await on.getByRole('heading', { level: 1, name, exact: true }).waitFor()
}

export async function press(on: Page, name: string): Promise<void> {
  await visible(on.getByRole('button', { name, exact: true })).click()
}

/** The index is there twice: as a margin, and as a menu for narrow screens. */
function visible(locator: Locator): Locator {
  return locator.filter({ visible: true })
}

export async function fill(on: Page, fields: Record<string, string>): Promise<void> {
  for (const [label, value] of Object.entries(fields)) await on.getByLabel(label, { exact: true }).fill(value)
}

/** Waits until the page shows a reading within 5 % of the exact value. */
export async function readingOnPage(on: Page, exact: number): Promise<void> {
  await on.waitForFunction(
    (wanted) => {
      const shown = document.querySelector('dl[aria-label="Figures of the reading"] dd span')?.textContent
      return Math.abs(Number.parseFloat(shown ?? '') / wanted - 1) < 0.05
    },
    exact,
    { timeout: 90_000 },
  )
}

/** A command of the Joining page with its capitals filled in, and its port. */
export function filledIn(command: string | undefined, name: string, port: number): string {
  return (command ?? '')
    .replaceAll('NAME', name)
    .replaceAll(/HOST|PEER/g, '127.0.0.1')
    .replaceAll('7600', `${port}`)
}

/** Names of visible buttons and links with which something could be changed. */
export async function offers(on: Page): Promise<string[]> {
  const offering = on
    .locator('button, a')
    .filter({ visible: true, hasText: /\b(create|new|add|revoke|remove|save the|joining|audit)\b/i })
  return offering.allInnerTexts()
}

/** An event stream that brings so many different readings at once; the verdict of the last is "Number <count>." */
export function burstOf(reading: Reading, count: number): string {
  const messages = Array.from({ length: count }, (_, index) => {
    const at = new Date(Date.parse(reading.at) + 200 * index).toISOString()
    return `event: reading\ndata: ${JSON.stringify({ ...reading, at, verdict: `Number ${index + 1}.` })}\n\n`
  })
  return messages.join('')
}
