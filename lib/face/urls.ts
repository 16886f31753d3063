/** Addresses of the API that pages read. */
export function overlayUrls(slug: string) {
  const base = `/api/v1/overlays/${encodeURIComponent(slug)}`
  return {
    overlay: base,
    reading: `${base}/reading`,
    readings: `${base}/readings`,
    cut: `${base}/cut`,
    nodes: `${base}/nodes`,
    links: `${base}/links`,
    events: `${base}/events`,
    codes: `${base}/joining-codes`,
  }
}
