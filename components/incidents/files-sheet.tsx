'use client'

import { useRef, useState } from 'react'
import { Button, EmptyState, Outcome, Sheet, Time } from '@/components/ui'
import { problemSchema } from '@/lib/data/dto'
import { FILE_MOST_BYTES } from '@/lib/data/incident-dto'
import type { IncidentWhole } from '@/lib/data/warn-dto'
import { formatBytes } from '@/lib/face/incidents'
import { incidentUrls } from '@/lib/face/urls'

const KINDS = '.png,.jpg,.jpeg,.gif,.webp,.pdf,.txt,.log,.md,.csv,.json'

export function FilesSheet(props: { incident: IncidentWhole; may: boolean; onDone: () => void }) {
  const { incident, may, onDone } = props
  const urls = incidentUrls(incident.number)
  return (
    <Sheet heading="Files">
      {incident.files.length === 0 ? (
        <EmptyState title="No file is attached.">
          {may ? 'A photo, a log or a letter that belongs to it can be kept here.' : null}
        </EmptyState>
      ) : (
        <ul aria-label="Files">
          {incident.files.map((file) => (
            <li key={file.id} className="border-b border-hairline py-2">
              <a
                href={urls.file(file.id)}
                download
                className="inline-block break-all underline underline-offset-4"
              >
                {file.name}
              </a>
              <span className="block text-sm text-soft">
                {formatBytes(file.size)}
                {file.by ? `, by ${file.by.name}` : ''}, <Time at={file.at} show="moment" />
              </span>
            </li>
          ))}
        </ul>
      )}
      {may ? <Attach url={urls.attach} onDone={onDone} /> : null}
    </Sheet>
  )
}

function Attach({ url, onDone }: { url: (name: string) => string; onDone: () => void }) {
  const input = useRef<HTMLInputElement>(null)
  const [busy, setBusy] = useState(false)
  const [outcome, setOutcome] = useState<{ ok: boolean; text: string } | null>(null)

  async function send(file: File) {
    setBusy(true)
    const failed =
      file.size > FILE_MOST_BYTES ? 'A file may have at most 5 MB.' : await upload(url(file.name), file)
    setBusy(false)
    setOutcome(
      failed === null ? { ok: true, text: `${file.name} is attached.` } : { ok: false, text: failed },
    )
    if (input.current) input.current.value = ''
    onDone()
  }

  return (
    <div className="mt-4 space-y-3">
      <input
        ref={input}
        type="file"
        accept={KINDS}
        aria-label="File to attach"
        className="sr-only"
        tabIndex={-1}
        onChange={(event) => {
          const [file] = event.target.files ?? []
          if (file) void send(file)
        }}
      />
      <Button busy={busy} busyLabel="Attaching…" onClick={() => input.current?.click()}>
        Attach a file
      </Button>
      <p className="text-sm text-soft">PNG, JPEG, GIF, WebP, PDF, text, CSV or JSON, at most 5 MB.</p>
      {outcome ? <Outcome ok={outcome.ok}>{outcome.text}</Outcome> : null}
    </div>
  )
}

/** @returns null when done, or what went wrong */
async function upload(url: string, file: File): Promise<string | null> {
  try {
    const headers = { 'content-type': 'application/octet-stream', accept: 'application/json' }
    const response = await fetch(url, { method: 'POST', headers, body: file })
    if (response.ok) return null
    const problem = problemSchema.safeParse(await response.json().catch(() => null))
    return problem.success ? problem.data.detail : `The server answered ${response.status}.`
  } catch {
    return 'The server could not be reached. Try again.'
  }
}
