/** Brings the database at DATABASE_URL up to date and prints one JSON object: what was applied. */
import { databaseUrl, migrate, openOrm } from '@/lib/db'

const stopping = new AbortController()
process.once('SIGINT', () => stopping.abort())
process.once('SIGTERM', () => stopping.abort())

const orm = await openOrm(databaseUrl(), 2)
try {
  process.stdout.write(`${JSON.stringify({ applied: await migrate(orm, new Date(), stopping.signal) })}\n`)
} catch (error) {
  process.stderr.write(
    `${JSON.stringify({ error: error instanceof Error ? error.message : String(error) })}\n`,
  )
  process.exitCode = 1
} finally {
  await orm.close(true)
}
