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
    rules: `${base}/rules`,
    rulePreview: `${base}/rules/preview`,
    windows: `${base}/windows`,
  }
}

/** What this server says of the agent's file that it serves. */
export const AGENT_FILE_URL = '/agent/thinspan-agent.json'
