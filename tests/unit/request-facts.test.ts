import { describe, expect, it } from 'vitest'
import { cookieHeader, readCookie } from '@/lib/auth/cookie'
import { requestFacts } from '@/lib/http/request-facts'

const facts = (headers: Record<string, string>, address: string | null = null, trustedProxies = 0) =>
  requestFacts(new Headers({ host: 'thinspan.test:3000', ...headers }), 'POST', { address, trustedProxies })

describe('a request is foreign', () => {
  it.each([
    [false, 'from a page of this server', { origin: 'http://thinspan.test:3000' }],
    [false, 'when a proxy ended TLS without saying so', { origin: 'https://thinspan.test:3000' }],
    [true, 'from another host', { origin: 'http://elsewhere.example' }],
    [true, 'from another port', { origin: 'http://thinspan.test:4000' }],
    [true, 'from a sandboxed frame', { origin: 'null' }],
    [true, 'without an origin', {}],
    [
      true,
      'when the browser calls it cross-site',
      { origin: 'http://thinspan.test:3000', 'sec-fetch-site': 'cross-site' },
    ],
    [
      false,
      'when the browser calls it same-origin',
      { origin: 'http://thinspan.test:3000', 'sec-fetch-site': 'same-origin' },
    ],
  ])('%s: %s', (foreign, _name, headers) =>
    expect(facts(headers as Record<string, string>).foreign).toBe(foreign),
  )

  it('compares with the configured address where there is one', () => {
    const address = 'https://thinspan.example'
    expect(facts({ origin: 'https://thinspan.example' }, address)).toMatchObject({
      foreign: false,
      secure: true,
    })
    expect(facts({ origin: 'http://thinspan.test:3000' }, address)).toMatchObject({ foreign: true })
  })
})

describe('the facts of a request', () => {
  it('take the scheme from the first proxy, and with it whether cookies are secure', () => {
    expect(facts({ 'x-forwarded-proto': 'https,http' })).toMatchObject({
      origin: 'https://thinspan.test:3000',
      secure: true,
    })
    expect(facts({})).toMatchObject({ origin: 'http://thinspan.test:3000', secure: false })
  })

  it.each([
    [0, '192.0.2.7', null],
    [1, '192.0.2.7', '192.0.2.7'],
    [1, 'made up, 192.0.2.7', '192.0.2.7'],
    [2, 'made up,192.0.2.7,198.51.100.1', '192.0.2.7'],
    [2, '192.0.2.7', null],
    [1, undefined, null],
    [1, 'made up,', null],
  ])('with %i trusted proxies take the address from %j to be %j', (proxies, forwardedFor, address) => {
    const headers: Record<string, string> = forwardedFor ? { 'x-forwarded-for': forwardedFor } : {}
    expect(facts(headers, null, proxies).address).toBe(address)
  })

  it('survive a host that is none', () => {
    expect(facts({ host: '][', origin: 'http://elsewhere.example' })).toMatchObject({
      foreign: true,
      origin: 'http://localhost',
    })
  })

  it.each([
    [undefined, null],
    ['Bearer abc', 'abc'],
    ['bearer abc', 'abc'],
    ['Basic abc', ''],
    ['Bearer a b', ''],
  ])('read authorization %j as token %j', (authorization, bearer) =>
    expect(facts(authorization ? { authorization } : {}).bearer).toBe(bearer),
  )
})

describe('cookies', () => {
  it('are found by their whole name', () => {
    expect(readCookie('a=1; thinspan_session=x=y; b=2', 'thinspan_session')).toBe('x=y')
    expect(readCookie('xthinspan_session=1', 'thinspan_session')).toBe(null)
    expect(readCookie(null, 'thinspan_session')).toBe(null)
  })

  it('are secure only over https', () => {
    const options = { path: '/', httpOnly: true, sameSite: 'lax', maxAge: 60 } as const
    expect(cookieHeader({ name: 'n', value: 'v', options: { ...options, secure: true } })).toBe(
      'n=v; Path=/; Max-Age=60; SameSite=Lax; HttpOnly; Secure',
    )
    expect(cookieHeader({ name: 'n', value: 'v', options: { ...options, secure: false } })).toBe(
      'n=v; Path=/; Max-Age=60; SameSite=Lax; HttpOnly',
    )
  })
})
