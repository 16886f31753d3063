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
    upgrades: `${base}/upgrades`,
    signingKey: `${base}/signing-key`,
  }
}

/** What this server says of the agent's file that it serves. */
export const AGENT_FILE_URL = '/agent/thinspan-agent.json'

/** What was sent, of a team or of one of its incidents. */
export function deliveriesUrl(of: { team?: string; incident?: string }): string {
  const query = new URLSearchParams(Object.entries(of).filter(([, value]) => value !== undefined)).toString()
  return query === '' ? '/api/v1/deliveries' : `/api/v1/deliveries?${query}`
}
