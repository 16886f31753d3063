import { createHash } from 'node:crypto'
import { z } from 'zod'
import { IncidentFileSchema } from '@/entities'
import { query } from '@/lib/collector/query'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { fileKind } from './file-kind'
import { enter, lockIncident } from './incident-acts'
import { FILE_MOST_BYTES, FILES_MOST_BYTES } from './incident-dto'
import { openIncident, toFile } from './incidents'
import type { IncidentFile as FileDto } from './warn-dto'

/** Also to a resolved one: what was learnt afterwards belongs to it. */
export async function attachFile(
  call: Call,
  number: number,
  { name: givenName, bytes }: { name: string; bytes: Uint8Array },
): Promise<FileDto> {
  const { incident, me } = await lockIncident(call, 'incident.file', number)
  if (bytes.length === 0) throw new AppError('wrong-file', 'The file is empty. Choose another.')
  if (bytes.length > FILE_MOST_BYTES) throw new AppError('too-large', 'A file may have at most 5 MB.')
  const kind = await fileKind(givenName, bytes)
  if (!kind.ok) throw new AppError('wrong-file', kind.because)
  const [sum] = await query<{ bytes: number }>(
    call.em,
    'select coalesce(sum(size), 0)::int as bytes from incident_files where incident_id = ?',
    [incident.id],
  )
  if ((sum?.bytes ?? 0) + bytes.length > FILES_MOST_BYTES)
    throw new AppError(
      'too-large',
      'The files of an incident may have at most 25 MB together. Attach something smaller, or note where it is kept.',
    )
  const { name, mediaType } = kind
  const file = call.em.create(IncidentFileSchema, {
    incident,
    name,
    mediaType,
    bytes: Buffer.from(bytes),
    size: bytes.length,
    sha256: createHash('sha256').update(bytes).digest('hex'),
    user: me,
    at: call.now,
  })
  await call.em.flush()
  call.note({ data: { file: name, bytes: bytes.length } })
  await enter(call, incident, me, 'file', `${me.name} attached ${name}`, { file: file.id })
  return toFile(file)
}

export interface ReadFile {
  name: string
  mediaType: string
  bytes: Uint8Array
}

export async function readFile(call: Call, number: number, id: string): Promise<ReadFile> {
  const incident = await openIncident(call, 'incident.read', number)
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const [file] = known
    ? await query<ReadFile>(
        call.em,
        'select name, media_type as "mediaType", bytes from incident_files where id = ? and incident_id = ?',
        [id, incident.id],
      )
    : []
  if (!file) throw new AppError('not-found', 'There is no such file. Load the incident again.')
  return file
}
