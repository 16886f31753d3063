'use client'

import { useRef, useState } from 'react'
import { ApiError, askJson } from '@/components/live/fetcher'
import { useWidth } from '@/components/stretch/use-width'
import { Button, DataTable, EmptyState, Outcome, SelectField, Time } from '@/components/ui'
import { type PreviewRange, type RulePreview, rulePreviewSchema } from '@/lib/data/rules-dto'
import { formatDuration } from '@/lib/face/time'
import { overlayUrls } from '@/lib/face/urls'
import type { Rule } from '@/lib/warn/rule'
import { PreviewChart } from './preview-chart'

const RANGE_CHOICES: readonly { value: PreviewRange; label: string }[] = [
  { value: '24h', label: 'last 24 hours' },
  { value: '7d', label: 'last 7 days' },
  { value: '30d', label: 'last 30 days' },
  { value: '1y', label: 'last year' },
]

/** Tries a rule on what is kept, before it is saved. */
export function Preview({ slug, rule }: { slug: string; rule: Rule | null }) {
  const [range, setRange] = useState<string>('7d')
  const [busy, setBusy] = useState(false)
  const [tried, setTried] = useState<{ of: string; preview: RulePreview } | null>(null)
  const [problem, setProblem] = useState<string | null>(null)
  const asked = JSON.stringify({ rule, range })

  async function tryIt() {
    setBusy(true)
    setProblem(null)
    try {
      const preview = await askJson(overlayUrls(slug).rulePreview, { rule, range }, rulePreviewSchema)
      setTried({ of: asked, preview })
    } catch (error) {
      setProblem(error instanceof ApiError ? error.message : 'It could not be tried. Try again.')
    }
    setBusy(false)
  }

  return (
    <div className="space-y-3 border-t border-hairline pt-5">
      <h3 className="text-base">Try it on history</h3>
      <div className="flex flex-wrap items-end gap-3">
        <SelectField
          label="On the"
          options={RANGE_CHOICES}
          value={range}
          onChange={(event) => setRange(event.target.value)}
          className="min-w-44"
        />
        <Button onClick={tryIt} busy={busy} busyLabel="Trying…" disabled={rule === null}>
          Try it
        </Button>
      </div>
      {problem ? <Outcome ok={false}>{problem}</Outcome> : null}
      {tried ? (
        <>
          {tried.of === asked ? null : (
            <p role="status" className="font-semibold">
              The rule or the range has changed since: try it again.
            </p>
          )}
          <Tried slug={slug} preview={tried.preview} />
        </>
      ) : null}
    </div>
  )
}

function Tried({ slug, preview }: { slug: string; preview: RulePreview }) {
  const frame = useRef<HTMLDivElement>(null)
  const width = useWidth(frame)
  return (
    <div className="space-y-3">
      <p role="status" className="max-w-3xl font-medium">
        {preview.sentence}
      </p>
      <div ref={frame} className="min-w-0 overflow-hidden">
        {width !== null && width > 0 ? <PreviewChart width={width} preview={preview} /> : null}
      </div>
      <p className="text-sm text-soft">
        Line: the reading. Hatched from below: under the floor. Shaded: where the rule would have been raised.
      </p>
      <DataTable
        caption="When the rule would have been raised"
        columns={[
          {
            id: 'raised',
            header: 'raised',
            value: ({ raisedAt }) => raisedAt,
            cell: ({ raisedAt }) => <Time at={raisedAt} show="moment" />,
          },
          {
            id: 'cleared',
            header: 'cleared',
            value: ({ clearedAt }) => clearedAt,
            cell: ({ clearedAt }) => (clearedAt ? <Time at={clearedAt} show="moment" /> : 'not yet'),
          },
          {
            id: 'lasted',
            header: 'lasted',
            value: ({ raisedAt, clearedAt }) =>
              formatDuration((Date.parse(clearedAt ?? preview.to) - Date.parse(raisedAt)) / 1000),
          },
        ]}
        rows={preview.spans}
        rowKey={({ raisedAt }) => raisedAt}
        csvName={`${slug}-rule-on-history`}
        empty={
          <EmptyState
            title={
              preview.points.length === 0 ? 'Nothing is kept of that time.' : 'It would not have been raised.'
            }
          />
        }
      />
      <ul className="list-disc space-y-1 pl-5 text-sm text-soft">
        {preview.notes.map((note) => (
          <li key={note} className="max-w-3xl">
            {note}
          </li>
        ))}
      </ul>
    </div>
  )
}
