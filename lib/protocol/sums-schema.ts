import type { ColonyCounters, ColonySums, PlacedSweepSums, Sums, SweepSums } from '../method/report'
import { MAX_COLONIES, MAX_THRESHOLDS } from './limits'
import { BIT, COUNT, FIXED, type ObjectReader, objectReadBy, type Range, type Unread } from './object-reader'

const MAX_PAIRS = (MAX_COLONIES * (MAX_COLONIES + 1)) / 2
const SLOT: Range = { least: 0, most: 0xffff }
const PLACE: Range = { least: 0, most: MAX_COLONIES }

const countersOf = (from: Unread<ColonyCounters>, reader: ObjectReader): ColonyCounters => ({
  seeded: reader.whole(from.seeded, COUNT, 'seeded'),
  births: reader.whole(from.births, COUNT, 'births'),
  kills: reader.whole(from.kills, COUNT, 'kills'),
  culls: reader.whole(from.culls, COUNT, 'culls'),
  dropped: reader.whole(from.dropped, COUNT, 'dropped'),
  sent: reader.whole(from.sent, COUNT, 'sent'),
  received: reader.whole(from.received, COUNT, 'received'),
  walkerTime: reader.whole(from.walkerTime, COUNT, 'walkerTime'),
  occupancyX: reader.whole(from.occupancyX, COUNT, 'occupancyX'),
  occupancyY: reader.whole(from.occupancyY, COUNT, 'occupancyY'),
  linkTime: reader.whole(from.linkTime, COUNT, 'linkTime'),
})

const colonyOf = (from: Unread<ColonySums>, reader: ObjectReader): ColonySums => ({
  colony: reader.whole(from.colony, SLOT, 'colony'),
  seeding: reader.whole(from.seeding, COUNT, 'seeding'),
  present: reader.whole(from.present, BIT, 'present'),
  counters: reader.object(from.counters, countersOf, 'counters'),
  heldX: reader.whole(from.heldX, COUNT, 'heldX'),
  heldY: reader.whole(from.heldY, COUNT, 'heldY'),
  mean: reader.whole(from.mean, FIXED, 'mean'),
})

function sweepOf(from: Unread<SweepSums>, reader: ObjectReader): SweepSums {
  const sweep = {
    id: reader.whole(from.id, COUNT, 'id'),
    above: reader.wholes(from.above, MAX_THRESHOLDS, BIT, 'above'),
    crossing: reader.wholes(from.crossing, MAX_THRESHOLDS, COUNT, 'crossing'),
    crossingWeight: reader.wholes(from.crossingWeight, MAX_THRESHOLDS, COUNT, 'crossingWeight'),
  }
  const { above, crossing, crossingWeight } = sweep
  const isPerThreshold = above.length === crossing.length && above.length === crossingWeight.length
  if (reader.isGood && !isPerThreshold)
    reader.fail('above, crossing and crossingWeight have one entry per threshold', from)
  return sweep
}

const placedSweepOf = (from: Unread<PlacedSweepSums>, reader: ObjectReader): PlacedSweepSums => ({
  ...sweepOf(from, reader),
  place: reader.whole(from.place, PLACE, 'place'),
  linkEnds: reader.whole(from.linkEnds, COUNT, 'linkEnds'),
  alone: reader.whole(from.alone, BIT, 'alone'),
})

function sumsOf(from: Unread<Sums>, reader: ObjectReader): Sums {
  const sums: Sums = {
    attached: reader.whole(from.attached, BIT, 'attached'),
    colonies: reader.objects(from.colonies, MAX_COLONIES, colonyOf, 'colonies'),
    energies: reader.wholes(from.energies, MAX_PAIRS, FIXED, 'energies'),
    moments: reader.wholes(from.moments, MAX_PAIRS, FIXED, 'moments'),
    linkEnds: reader.whole(from.linkEnds, COUNT, 'linkEnds'),
    linkEndWeight: reader.whole(from.linkEndWeight, COUNT, 'linkEndWeight'),
    sweep: from.sweep === null ? null : reader.object(from.sweep, sweepOf, 'sweep'),
    ...(from.sweeps !== undefined && {
      sweeps: reader.objects(from.sweeps, MAX_COLONIES, placedSweepOf, 'sweeps'),
    }),
  }
  if (!reader.isGood) return sums
  const size = sums.attached === 1 ? sums.colonies.length : 0
  const pairs = (size * (size + 1)) / 2
  for (const key of ['energies', 'moments'] as const)
    if (sums[key].length !== pairs) reader.fail(`${pairs} entries for ${size} colonies`, from[key], key)
  if (new Set(sums.colonies.map(({ colony }) => colony)).size !== sums.colonies.length)
    reader.fail('two colonies share a slot', from.colonies, 'colonies')
  return sums
}

export const sumsSchema = objectReadBy(sumsOf)
