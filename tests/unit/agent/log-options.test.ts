import { Writable } from 'node:stream'
import pino from 'pino'
import { expect, test } from 'vitest'
import { LOGGER_OPTIONS } from '@/agent/log-options'

test('a log line shows no secret, however deep it stands, and still says what an error is called by', () => {
  const lines: string[] = []
  const sink = new Writable({
    write(chunk, _, done) {
      lines.push(String(chunk))
      done()
    },
  })
  const logger = pino({ ...LOGGER_OPTIONS, level: 'debug' }, sink)
  const secrets = {
    token: 'S1',
    pass: 'S2',
    privateKey: 'S3',
    pendingKey: 'S4',
    signature: 'S5',
    key: 'S6',
    keys: ['S7'],
  }
  logger.debug({ ...secrets, code: 'S8' }, 'top')
  logger.info({ grant: secrets }, 'one down')
  logger.warn({ request: { grant: secrets } }, 'two down')
  logger.error({ a: { b: { c: secrets } }, error: { code: 'refused' } }, 'three down')
  const text = lines.join('')
  expect(lines).toHaveLength(4)
  expect(text).not.toMatch(/"S\d"/)
  expect(text).toContain('"code":"refused"')
})
