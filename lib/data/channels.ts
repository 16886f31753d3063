import type { z } from 'zod'
import { type Channel, ChannelSchema, UserSchema } from '@/entities'
import { sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { quietUntil } from '@/lib/notify/quiet'
import type { Channel as ChannelDto, channelChangeSchema, newChannelSchema } from './telling-dto'

const MOST_CHANNELS = 10

/** The caller's own, whatever the team. */
export async function listChannels(call: Call): Promise<ChannelDto[]> {
  authorise(call, 'channel.list')
  const channels = await call.em.find(
    ChannelSchema,
    { user: userOf(call) },
    { orderBy: { createdAt: 'asc', id: 'asc' } },
  )
  return channels.map((channel) => toDto(channel, call.now))
}

export async function addChannel(call: Call, input: z.output<typeof newChannelSchema>): Promise<ChannelDto> {
  authorise(call, 'channel.change')
  const { em, now } = call
  const user = userOf(call)
  call.note({ subject: `${input.kind} ${input.address}`, data: { added: true } })
  await sql(em, 'select id from users where id = ? for update', [user])
  const all = await em.find(ChannelSchema, { user })
  if (all.length >= MOST_CHANNELS)
    throw new AppError('invalid-input', `You have ${MOST_CHANNELS} channels; remove one first.`)
  if (all.some(({ kind, address }) => kind === input.kind && address === input.address))
    throw new AppError('invalid-input', 'You have this channel already.', {
      errors: [{ path: 'address', message: 'You have this channel already.' }],
    })
  const channel = em.create(ChannelSchema, {
    ...input,
    user: em.getReference(UserSchema, user),
    leastSeverity: 'note',
    quiet: null,
    isOn: true,
    createdAt: now,
  })
  await em.flush()
  return toDto(channel, now)
}

export async function changeChannel(
  call: Call,
  { id, ...change }: z.output<typeof channelChangeSchema> & { id: string },
): Promise<ChannelDto> {
  const channel = await channelMeant(call, id)
  call.note({ data: { ...change } })
  Object.assign(channel, change)
  await call.em.flush()
  return toDto(channel, call.now)
}

/** What waits to be sent by it goes with it. */
export async function removeChannel(call: Call, id: string): Promise<void> {
  const channel = await channelMeant(call, id)
  call.note({ data: { removed: true } })
  await call.em.removeAndFlush(channel)
}

async function channelMeant(call: Call, id: string): Promise<Channel> {
  authorise(call, 'channel.change')
  const channel = await call.em.findOne(ChannelSchema, { id, user: userOf(call) })
  if (!channel) throw new AppError('not-found', 'You have no such channel. Load the page again.')
  call.note({ subject: `${channel.kind} ${channel.address}` })
  return channel
}

function userOf({ caller }: Call): string {
  if (caller.kind === 'user') return caller.userId
  throw new AppError('forbidden', 'Channels are people’s own. Sign in and change them on the page.')
}

function toDto(channel: Channel, now: Date): ChannelDto {
  const { id, kind, address, leastSeverity, isOn, quiet = null } = channel
  const untilMs = quiet && quietUntil(quiet, now.getTime())
  const until = untilMs === null ? null : new Date(untilMs).toISOString()
  return { id, kind, address, leastSeverity, isOn, quiet, quietUntil: until }
}
