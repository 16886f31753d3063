import { describe, expect, it } from 'vitest'
import { fakesEnv, fakesSentence, fakesWanted, parseFakesLine } from '@/scripts/lib/fakes.mjs'

const said = { httpUrl: 'http://127.0.0.1:4001', smtpUrl: 'smtp://127.0.0.1:4002' }

describe('stand-ins', () => {
  it('are named by the line their program says', () => {
    expect(parseFakesLine(JSON.stringify({ fakes: said }))).toEqual(said)
    expect(parseFakesLine('listening')).toBeNull()
    expect(parseFakesLine('{"fakes":{}}')).toBeNull()
  })

  it('take the place of what is not set up, and of nothing else', () => {
    const real = {
      THINSPAN_SMTP_URL: 'smtps://mail.harbourline.example',
      THINSPAN_MAIL_FROM: 'a@harbourline.example',
    }
    expect(fakesWanted(real)).toEqual({ mail: false, sms: true })
    expect(Object.keys(fakesEnv(real, said)).sort()).toEqual([
      'THINSPAN_FAKES_URL',
      'THINSPAN_SMS_URL',
      'THINSPAN_TWILIO_FROM',
      'THINSPAN_TWILIO_SID',
      'THINSPAN_TWILIO_TOKEN',
    ])
    expect(fakesEnv({}, said)).toMatchObject({
      THINSPAN_SMTP_URL: said.smtpUrl,
      THINSPAN_FAKES_URL: said.httpUrl,
    })
    expect(fakesWanted({ ...real, THINSPAN_TWILIO_SID: 'AC1' })).toEqual({ mail: false, sms: false })
  })

  it('are said to reach nobody', () => {
    expect(fakesSentence({}, 'http://localhost:3000')).toBe(
      'E-mail and SMS reach nobody: stand-ins on this machine keep them, to be read at http://localhost:3000/dev/messages.',
    )
  })
})
