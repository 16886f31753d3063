/** Whether the caller has this very version already. RFC 9110, sections 8.8.3.2 and 13.1.2: compared weakly. */
export function isUnchanged(request: { headers: Pick<Headers, 'get'> }, etag: string): boolean {
  const known = request.headers.get('if-none-match')?.split(',') ?? []
  return known.some((tag) => tag.trim() === '*' || tag.trim().replace(/^W\//, '') === etag)
}
