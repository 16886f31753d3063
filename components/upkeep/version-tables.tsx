'use client'

import { type Column, DataTable, EmptyState, Mark, Time } from '@/components/ui'
import type { AgentRelease, Upgrades } from '@/lib/data/dto'

export function VersionTables({ slug, upgrades }: { slug: string; upgrades: Upgrades }) {
  const { releases, versions } = upgrades
  const current = releases.find((release) => release.current)?.version ?? null
  return (
    <div className="grid gap-x-12 gap-y-6 lg:grid-cols-[minmax(0,2fr)_minmax(0,3fr)]">
      <section>
        <h3 className="mb-1 text-base">In use</h3>
        <DataTable
          caption="Versions in use"
          columns={inUse(current)}
          rows={versions}
          rowKey={(v) => v.version}
          csvName={`${slug}-versions`}
          initialSort={{ id: 'agents', descending: true }}
          empty={<EmptyState title="No agent has joined yet." />}
        />
      </section>
      <section>
        <h3 className="mb-1 text-base">On this server</h3>
        <DataTable
          caption="Versions on this server"
          columns={RELEASES}
          rows={releases}
          rowKey={(r) => r.version}
          stacks
          csvName={`${slug}-releases`}
          initialSort={{ id: 'added', descending: true }}
          empty={
            <EmptyState title="This server holds no agent to offer.">
              Each start of the server adds the version that it was built with.
            </EmptyState>
          }
        />
      </section>
    </div>
  )
}

function inUse(current: string | null): Column<Upgrades['versions'][number]>[] {
  return [
    { id: 'version', header: 'version', value: (v) => v.version },
    {
      id: 'current',
      header: 'is',
      value: (v) => (v.version === current ? 'current' : 'another'),
      cell: (v) =>
        v.version === current ? <Mark shape="full">current</Mark> : <Mark shape="hollow">another</Mark>,
    },
    { id: 'agents', header: 'agents', figures: true, value: (v) => v.agents },
  ]
}

const RELEASES: Column<AgentRelease>[] = [
  {
    id: 'version',
    header: 'version',
    value: (r) => r.version,
    cell: (r) => (
      <>
        {r.version}
        {r.current ? <span className="text-soft"> (current)</span> : null}
      </>
    ),
  },
  {
    id: 'added',
    header: 'here since',
    value: (r) => r.addedAt,
    cell: (r) => <Time at={r.addedAt} show="moment" />,
  },
  {
    id: 'bytes',
    header: 'kB',
    figures: true,
    value: (r) => Math.round(r.bytes / 1000),
  },
  {
    id: 'sha256',
    header: 'SHA-256',
    value: (r) => r.sha256,
    cell: (r) => <span className="block max-w-72 font-figures text-sm wrap-anywhere">{r.sha256}</span>,
  },
]
