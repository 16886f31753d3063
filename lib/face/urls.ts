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
    weak: `${base}/weak`,
    moments: `${base}/moments`,
    node: (name: string) => `${base}/nodes/${encodeURIComponent(name)}`,
    link: (a: string, b: string) => `${base}/links/${encodeURIComponent(a)}/${encodeURIComponent(b)}`,
    events: `${base}/events`,
    codes: `${base}/joining-codes`,
    upgrades: `${base}/upgrades`,
    signingKey: `${base}/signing-key`,
    incidents: `${base}/incidents`,
    rules: `${base}/rules`,
    rulePreview: `${base}/rules/preview`,
    windows: `${base}/windows`,
    rehearsals: `${base}/rehearsals`,
    rehearsal: (id: string) => `${base}/rehearsals/${encodeURIComponent(id)}`,
    reinforcement: `${base}/reinforcement`,
    plannedLinks: `${base}/reinforcement/planned`,
    exported: (file: string) => `${base}/export/${file}`,
    partners: `${base}/partners`,
  }
}

/** Addresses of pages that tables and drawings lead to. */
export function overlayPageUrls(slug: string) {
  const base = `/overlays/${encodeURIComponent(slug)}`
  return {
    weak: `${base}/weak`,
    nodes: `${base}/nodes`,
    node: (name: string) => `${base}/nodes/${encodeURIComponent(name)}`,
    link: (a: string, b: string) => `${base}/links/${encodeURIComponent(a)}/${encodeURIComponent(b)}`,
  }
}

/** What this server says of the agent's file that it serves. */
export const AGENT_FILE_URL = '/agent/thinspan-agent.json'

/** What was sent, of a team or of one of its incidents. */
export function deliveriesUrl(of: { team?: string; incident?: string }): string {
  const query = new URLSearchParams(Object.entries(of).filter(([, value]) => value !== undefined)).toString()
  return query === '' ? '/api/v1/deliveries' : `/api/v1/deliveries?${query}`
}

/** All of them begin so: what the event stream says is out of date is asked for again. */
export const INCIDENTS_URL = '/api/v1/incidents'

export function incidentUrls(number: number) {
  const base = `${INCIDENTS_URL}/${number}`
  const page = `/incidents/${number}`
  return {
    incident: base,
    attach: (name: string) => `${base}/files?name=${encodeURIComponent(name)}`,
    page,
    file: (id: string) => `${page}/files/${encodeURIComponent(id)}`,
    /** With times of the reader's zone beside those in UTC. */
    report: (zone: string | null) => `${page}/report.pdf${zone ? `?zone=${encodeURIComponent(zone)}` : ''}`,
  }
}

export function monthReportUrl(slug: string, month: string): string {
  return `/overlays/${encodeURIComponent(slug)}/report.pdf?month=${month}`
}

/** A part of a page's path as people write it; one that is no valid encoding stays as it is. */
export function pathPart(part: string): string {
  try {
    return decodeURIComponent(part)
  } catch {
    return part
  }
}
