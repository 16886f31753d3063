/**
 * Stand-ins for a mail server, the SMS service and a webhook receiver, on loopback and in memory: what `npm start` sends to
 * where its operator set up nothing else. Composition root. Says one line of JSON once they listen.
 */
import { readFileSync, writeFileSync } from 'node:fs'
import { join, resolve } from 'node:path'
import { nothingKept, startFakeHttp, startFakeSmtp } from './fakes/index'
import { dataFolderOf } from './lib/own-database.mjs'

const components = { kept: nothingKept(), now: () => new Date() }
const portFile = join(dataFolderOf(process.env, resolve(import.meta.dirname, '..')), 'stand-in-port')
const [http, smtp] = await Promise.all([startWhereItWas(), startFakeSmtp(components)])
process.stdout.write(`${JSON.stringify({ fakes: { httpUrl: http.url, smtpUrl: smtp.url } })}\n`)
for (const name of ['SIGTERM', 'SIGINT'] as const) {
  process.once(name, () => void Promise.all([http.stop(), smtp.stop()]).then(() => process.exit(0)))
}

/** Webhooks that point here are to find it again after a restart. */
async function startWhereItWas() {
  const port = rememberedPort()
  const started = await startFakeHttp(components, { port }).catch(() => startFakeHttp(components))
  writeFileSync(portFile, new URL(started.url).port, { mode: 0o600 })
  return started
}

function rememberedPort(): number {
  try {
    return Number(readFileSync(portFile, 'utf8')) || 0
  } catch {
    return 0
  }
}
