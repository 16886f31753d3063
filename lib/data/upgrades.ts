import { z } from 'zod'
import { UpgradeOfferSchema, UserSchema } from '@/entities'
import { enterEvent } from '@/lib/collector/events-store'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import type { newUpgradeOfferSchema, UpgradeOfferDto, Upgrades } from './dto'
import { openOverlayAs } from './overlays'
import { listReleases } from './releases'
import { findStandings, toOffer, versionsOf } from './upgrade-counts'

export { addRelease, findRelease, type Release } from './releases'

/** What can be offered, what was to the team's agents, newest first, and who of them runs what. */
export async function getUpgrades(call: Call, slug: string): Promise<Upgrades> {
  const { overlay, teamId } = await openOverlayAs(call, 'upgrade.read', slug)
  const standings = await findStandings(call.em, overlay, teamId)
  const offers = await call.em.find(
    UpgradeOfferSchema,
    { overlay: overlay.id, team: teamId },
    { populate: ['offeredBy'], orderBy: { offeredAt: 'desc', id: 'asc' } },
  )
  return {
    releases: await listReleases(call.em),
    offers: offers.map((offer) => toOffer(offer, standings)),
    versions: versionsOf(standings),
  }
}

/** Goes out with the next replies. Of several offers that fit an agent the newest counts. */
export async function offerUpgrade(
  call: Call,
  slug: string,
  { version, label }: z.output<typeof newUpgradeOfferSchema>,
): Promise<UpgradeOfferDto> {
  const { overlay, teamId } = await openOverlayAs(call, 'upgrade.offer', slug)
  const whom = label ? `${label.key} = ${label.value}` : 'every node'
  call.note({ subject: `${overlay.slug}: ${version}`, data: { version, label } })
  const releases = await listReleases(call.em)
  if (!releases.some((release) => release.version === version))
    throw new AppError('invalid-input', `This server holds no agent of version ${version}.`, {
      errors: [{ path: 'version', message: 'Choose one of the versions listed.' }],
    })
  const { caller, em, now } = call
  const offer = em.create(UpgradeOfferSchema, {
    overlay,
    team: teamId,
    version,
    labelKey: label?.key ?? null,
    labelValue: label?.value ?? null,
    offeredAt: now,
    offeredBy: 'userId' in caller ? await em.findOne(UserSchema, caller.userId) : null,
  })
  await em.flush()
  const text = `Version ${version} offered to ${whom}`
  await enterEvent(em, overlay.id, { kind: 'upgrade-offered', text, teamId })
  return toOffer(offer, await findStandings(em, overlay, teamId))
}

/** From the next replies on it is offered no more; what has been taken stays. A second halt changes nothing. */
export async function haltUpgrade(call: Call, slug: string, id: string): Promise<UpgradeOfferDto> {
  const { overlay, teamId } = await openOverlayAs(call, 'upgrade.halt', slug)
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const where = { id, overlay: overlay.id, team: teamId }
  const offer = known ? await call.em.findOne(UpgradeOfferSchema, where, { populate: ['offeredBy'] }) : null
  if (!offer) throw new AppError('not-found', 'There is no such offer. Load the list again.')
  call.note({ subject: `${overlay.slug}: ${offer.version}` })
  if (!offer.haltedAt) {
    offer.haltedAt = call.now
    await call.em.flush()
    const text = `Version ${offer.version} is offered no more`
    await enterEvent(call.em, overlay.id, { kind: 'upgrade-halted', text, teamId })
  }
  return toOffer(offer, await findStandings(call.em, overlay, teamId))
}
