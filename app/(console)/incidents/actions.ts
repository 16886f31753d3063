'use server'

import { z } from 'zod'
import {
  handOverIncident,
  muteIncident,
  noteOnIncident,
  reopenIncident,
  resolveIncident,
  takeIncident,
  unmuteIncident,
} from '@/lib/data/incident-acts'
import {
  incidentNumberSchema,
  muteMinutesSchema,
  noteTextSchema,
  reasonSchema,
  reopenReasonSchema,
  resolveWordSchema,
} from '@/lib/data/incident-dto'
import { action } from '@/lib/http'
import { enqueue } from '@/lib/notify/outbox'

const components = { enqueue }
const which = z.object({ number: incidentNumberSchema })

export const takeAction = action('incident.take', which, (call, { number }) =>
  takeIncident(call, number, components),
)

export const handOverAction = action(
  'incident.hand-over',
  which.extend({ userId: z.uuid('Choose who gets it.') }),
  (call, { number, userId }) => handOverIncident(call, number, { userId }, components),
)

export const noteAction = action(
  'incident.note',
  which.extend({ text: noteTextSchema }),
  (call, { number, text }) => noteOnIncident(call, number, text),
)

export const muteAction = action(
  'incident.mute',
  which.extend({ minutes: muteMinutesSchema, because: reasonSchema }),
  (call, { number, ...input }) => muteIncident(call, number, input),
)

export const unmuteAction = action('incident.mute', which, (call, { number }) => unmuteIncident(call, number))

export const resolveAction = action(
  'incident.resolve',
  which.extend({ word: resolveWordSchema }),
  (call, { number, word }) => resolveIncident(call, number, word, components),
)

export const reopenAction = action(
  'incident.reopen',
  which.extend({ because: reopenReasonSchema }),
  (call, { number, because }) => reopenIncident(call, number, because, components),
)
