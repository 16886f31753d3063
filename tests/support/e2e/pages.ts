import type { Locator, Page } from 'playwright-core'
import type { Reading } from '@/lib/data/dto'
import { PATIENCE_MS } from '../until'

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
    { timeout: PATIENCE_MS },
  )
}

/** The text of a block that is ready to copy, of those in sight. */
export async function commandOn(on: Page, label: string): Promise<string> {
  return (await on.getByRole('figure', { name: label, exact: true }).locator('pre').textContent()) ?? ''
}

/** Opens one of the parts that are closed behind their heading. */
export async function unfold(on: Page, title: string): Promise<void> {
  await on.getByRole('heading', { level: 3, name: title, exact: true }).click()
}

/** Commands of the trial, with a range of ports that is free instead of 7600 to 7609. */
export function onPorts(command: string, firstOfTen: number): string {
  return command.replaceAll('760', String(firstOfTen / 10))
}

/** Names of visible buttons and links with which something could be changed. */
export async function offers(on: Page): Promise<string[]> {
  const offering = on.locator('button, a').filter({
    visible: true,
    hasText:
      /\b(create|new|add|revoke|retire|readmit|remove|save(?! as)|offer it|halt|replace|joining|audit)\b/i,
  })
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
