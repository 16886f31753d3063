import axe, { type AxeResults, type RunOptions } from 'axe-core'
import { type Browser, type BrowserContext, chromium, type Page, type Request } from 'playwright-core'
import { findChromium } from '@/scripts/lib/chromium.mjs'
import { PATIENCE_MS } from '../until'

const FLAGS = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
]
const SERIOUS = ['serious', 'critical']

/** A server action as a browser sent it: enough to send it again as somebody else. */
export interface SentAction {
  url: string
  headers: Record<string, string>
  body: Buffer
}

/** One person's browser: cookies of its own; what goes wrong in its pages is noted. */
export class Person {
  readonly page: Page
  readonly faults: string[] = []
  readonly actions: SentAction[] = []
  readonly #context: BrowserContext

  private constructor(context: BrowserContext, page: Page) {
    this.#context = context
    this.page = page
  }

  static async open(browser: Browser, baseURL: string): Promise<Person> {
    const context = await browser.newContext({
      baseURL,
      viewport: { width: 1440, height: 900 },
      colorScheme: 'light',
    })
    context.setDefaultTimeout(PATIENCE_MS)
    const person = new Person(context, await context.newPage())
    person.#watch(person.page)
    return person
  }

  async newTab(path: string): Promise<Page> {
    const page = await this.#context.newPage()
    this.#watch(page)
    await page.goto(path)
    return page
  }

  /** As a Cookie header. */
  async cookie(): Promise<string> {
    return (await this.#context.cookies()).map(({ name, value }) => `${name}=${value}`).join('; ')
  }

  #watch(page: Page): void {
    page.on('pageerror', (error) => this.faults.push(`${page.url()}: ${error.message}`))
    page.on('console', (message) => {
      if (message.type() === 'error') this.faults.push(`${page.url()}: ${message.text()}`)
    })
    page.on('request', (request) => this.#note(request))
  }

  #note(request: Request): void {
    const headers = request.headers()
    const body = request.postDataBuffer()
    const [action, type] = [headers['next-action'], headers['content-type']]
    if (!action || !type || !body) return
    this.actions.push({ url: request.url(), headers: { 'next-action': action, 'content-type': type }, body })
  }
}

export function launch(): Promise<Browser> {
  const executablePath = findChromium(process.env)
  if (executablePath === null)
    throw new Error('There is no Chromium: install the package chromium, or set CHROMIUM_PATH.')
  return chromium.launch({ executablePath, headless: true, args: FLAGS })
}

/** What axe finds serious or critical on the page as it is, by day, and of colours by night; one line each. */
export async function seriousFindings(page: Page): Promise<string[]> {
  await page.evaluate(axe.source)
  await page.emulateMedia({ colorScheme: 'dark' })
  // Of axe's rules only this one looks at colours.
  const night = await runAxe(page, { runOnly: ['color-contrast'] })
  await page.emulateMedia({ colorScheme: 'light' })
  const day = await runAxe(page, {})
  return [...linesOf('by night', night), ...linesOf('by day', day)]
}

/** Once for the whole document, as pages here have no frames: half the time of going through its builder. */
function runAxe(page: Page, options: RunOptions): Promise<AxeResults> {
  return page.evaluate<AxeResults>(
    `axe.run(document, ${JSON.stringify({ ...options, resultTypes: ['violations'] })})`,
  )
}

function linesOf(when: string, { url, violations }: AxeResults): string[] {
  return violations.flatMap(({ impact, id, nodes }) => {
    const [first] = nodes
    if (!first || !SERIOUS.includes(impact ?? '')) return []
    return [
      `${url} ${when}: ${id} (${impact}, ${nodes.length}) ${first.target.join(' ')} ${first.failureSummary}`,
    ]
  })
}
