import { describe, expect, it } from 'vitest'
import {
  contentSecurityPolicy,
  fixedPolicy,
  redirectFor,
  safeNext,
  securityHeaders,
} from '@/lib/http/security-headers'

describe('the content security policy', () => {
  it('runs scripts and styles by nonce only', () => {
    expect(contentSecurityPolicy('abc', false)).toBe(
      "default-src 'self'; script-src 'nonce-abc' 'strict-dynamic'; style-src 'self' 'nonce-abc'; " +
        "img-src 'self' data: blob:; font-src 'self'; connect-src 'self'; object-src 'none'; base-uri 'none'; " +
        "form-action 'self'; frame-ancestors 'none'",
    )
  })

  it('never allows inline or evaluated scripts outside development', () => {
    expect(contentSecurityPolicy('abc', false)).not.toMatch(/unsafe/)
    expect(contentSecurityPolicy('abc', true)).toMatch(
      /script-src 'nonce-abc' 'strict-dynamic' 'unsafe-eval';/,
    )
  })
})

describe('a file that is handed back to be saved', () => {
  it.each(['/incidents/12/files/3f', '/incidents/12/report.pdf', '/overlays/tides/report.pdf'])(
    '%s may run nothing, wherever it is opened',
    (path) => expect(fixedPolicy(path)).toBe("default-src 'none'; frame-ancestors 'none'; sandbox"),
  )

  it('is none of the pages, which have a policy for each request', () =>
    expect(
      ['/incidents/12', '/incidents', '/overlays/tides', '/overlays/report.pdfs'].map(fixedPolicy),
    ).toEqual([null, null, null, null]))
})

describe('security headers', () => {
  it('promise https only where it is in use', () => {
    expect(securityHeaders(false)).not.toHaveProperty('strict-transport-security')
    expect(securityHeaders(true)).toMatchObject({
      'x-content-type-options': 'nosniff',
      'strict-transport-security': 'max-age=31536000; includeSubDomains',
    })
  })
})

describe('a visitor without a cookie', () => {
  it.each([
    ['/', '', '/sign-in'],
    ['/overlays', '', '/sign-in?next=%2Foverlays'],
    ['/audit', '?team=a', '/sign-in?next=%2Faudit%3Fteam%3Da'],
    ['/sign-in', '', null],
    ['/sign-inside', '', '/sign-in?next=%2Fsign-inside'],
    ['/first-run', '', null],
    ['/set-password/x', '', null],
    ['/api/health', '', null],
    ['/apiary', '', '/sign-in?next=%2Fapiary'],
  ])('at %s%s is sent to %s', (path, search, target) => {
    expect(redirectFor(path, search, false)).toBe(target)
    expect(redirectFor(path, search, true)).toBe(path === '/' ? '/overlays' : null)
  })
})

describe('where to go after signing in', () => {
  it.each([
    [undefined, '/overlays'],
    ['/audit?team=a', '/audit?team=a'],
    ['https://elsewhere.example/', '/overlays'],
    ['//elsewhere.example/', '/overlays'],
    ['/\\elsewhere.example/', '/overlays'],
    ['/x/..//elsewhere.example', '/overlays'],
    ['javascript:alert(1)', '/overlays'],
    ['/\t/elsewhere.example', '/overlays'],
  ])('%j leads to %s', (next, target) => expect(safeNext(next)).toBe(target))
})
