import { ATTACHMENT_CONTENT_SECURITY_POLICY } from './security-headers'

/** A file to be saved. The name is put twice, as RFC 6266 (appendix D) advises: in ASCII, and as it is (RFC 8187). */
export function attachment(file: { name: string; mediaType: string; bytes: Uint8Array }): Response {
  const { name, mediaType, bytes } = file
  const ascii = name.replace(/[^\x20-\x7e]|["\\%]/g, '_')
  const whole = encodeURIComponent(name).replace(
    /['()*]/g,
    (c) => `%${c.charCodeAt(0).toString(16).toUpperCase()}`,
  )
  const type = mediaType.startsWith('text/') ? `${mediaType}; charset=utf-8` : mediaType
  return new Response(new Uint8Array(bytes), {
    headers: {
      'content-type': type,
      'content-length': String(bytes.length),
      'content-disposition': `attachment; filename="${ascii}"; filename*=UTF-8''${whole}`,
      'content-security-policy': ATTACHMENT_CONTENT_SECURITY_POLICY,
      'x-content-type-options': 'nosniff',
      'cache-control': 'private, no-store',
    },
  })
}
