/** The margin index: lettered pages of an overlay, and the pages beside them. */
export interface PageEntry {
  letter: string | null
  label: string
  href: string
  /** Shown to operators and owners only; the page itself checks. */
  operator?: boolean
}

export function overlayPages(slug: string): PageEntry[] {
  const base = `/overlays/${encodeURIComponent(slug)}`
  return [
    { letter: 'A', label: 'Now', href: base },
    { letter: 'B', label: 'Weak place', href: `${base}/weak` },
    { letter: 'C', label: 'Rehearsals', href: `${base}/rehearsals` },
    { letter: 'D', label: 'Reinforcement', href: `${base}/reinforcement` },
    { letter: 'E', label: 'Nodes', href: `${base}/nodes` },
    { letter: 'F', label: 'Joining', href: `${base}/joining`, operator: true },
    { letter: 'G', label: 'Upkeep', href: `${base}/upkeep` },
    { letter: 'H', label: 'Warnings', href: `${base}/warnings` },
    { letter: 'I', label: 'Partners', href: `${base}/partners` },
  ]
}

export const OTHER_PAGES: readonly PageEntry[] = [
  { letter: null, label: 'Overlays', href: '/overlays' },
  { letter: null, label: 'Incidents', href: '/incidents' },
  { letter: null, label: 'Telling', href: '/telling' },
  { letter: null, label: 'Team', href: '/team' },
  { letter: null, label: 'Audit', href: '/audit', operator: true },
]

/** The slug of the overlay a path belongs to, or null. */
export function overlayOfPath(path: string): string | null {
  const slug = /^\/overlays\/([^/]+)/.exec(path)?.[1]
  return slug && slug !== 'new' ? decodeURIComponent(slug) : null
}
