/**
 * Stand-ins for a mail server, the SMS service and a webhook receiver, on loopback and in memory: what `npm start` sends to
 * where its operator set up nothing else. Composition root. Says one line of JSON once they listen.
 */
import { nothingKept, startFakeHttp, startFakeSmtp } from './fakes/index'

const components = { kept: nothingKept(), now: () => new Date() }
const [http, smtp] = await Promise.all([startFakeHttp(components), startFakeSmtp(components)])
process.stdout.write(`${JSON.stringify({ fakes: { httpUrl: http.url, smtpUrl: smtp.url } })}\n`)
for (const name of ['SIGTERM', 'SIGINT'] as const) {
  process.once(name, () => void Promise.all([http.stop(), smtp.stop()]).then(() => process.exit(0)))
}
