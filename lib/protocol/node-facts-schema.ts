import { type AgentHealth, LINK_KINDS, type NodeFacts, UPGRADE_STATES } from '../method/report'
import { MAX_REPORT_LINKS } from './limits'
import { COUNT, type ObjectReader, objectReadBy, type Range, SHARE, type Unread } from './object-reader'

const ANY: Range = { least: -Number.MAX_VALUE, most: Number.MAX_VALUE }
const NOT_NEGATIVE: Range = { least: 0, most: Number.MAX_VALUE }
const PEER: Range = { least: 1, most: 64 }
const NAME: Range = { least: 0, most: 40 }
const ERROR: Range = { least: 0, most: 300 }
const MAX_SKILLS = 16

type Value = NonNullable<NodeFacts['value']>
type NamedLink = NodeFacts['links'][number]
type Source = NonNullable<AgentHealth['source']>
type Upgrade = NonNullable<AgentHealth['upgrade']>

const fiedlerOf = (from: Unread<Value>, reader: ObjectReader): Value => ({
  sweep: reader.whole(from.sweep, COUNT, 'sweep'),
  value: reader.number(from.value, ANY, 'value'),
})

const linkOf = (from: Unread<NamedLink>, reader: ObjectReader): NamedLink => ({
  peer: reader.text(from.peer, PEER, 'peer'),
  weight: reader.number(from.weight, SHARE, 'weight'),
  share: from.share === null ? null : reader.number(from.share, NOT_NEGATIVE, 'share'),
})

const errorOf = (error: unknown, reader: ObjectReader, at: PropertyKey): string | null =>
  error === null ? null : reader.text(error, ERROR, at)

const sourceOf = (from: Unread<Source>, reader: ObjectReader): Source => ({
  kind: reader.text(from.kind, NAME, 'kind'),
  error: errorOf(from.error, reader, 'error'),
})

const upgradeOf = (from: Unread<Upgrade>, reader: ObjectReader): Upgrade => ({
  version: reader.text(from.version, NAME, 'version'),
  state: reader.oneOf(from.state, UPGRADE_STATES, 'state'),
  error: errorOf(from.error, reader, 'error'),
})

const healthOf = (from: Unread<AgentHealth>, reader: ObjectReader): AgentHealth => ({
  clockSkewMs: reader.number(from.clockSkewMs, ANY, 'clockSkewMs'),
  reportTookMs:
    from.reportTookMs === null ? null : reader.number(from.reportTookMs, NOT_NEGATIVE, 'reportTookMs'),
  reportsFailed: reader.whole(from.reportsFailed, COUNT, 'reportsFailed'),
  ticks: reader.whole(from.ticks, COUNT, 'ticks'),
  ticksLate: reader.whole(from.ticksLate, COUNT, 'ticksLate'),
  lastError: errorOf(from.lastError, reader, 'lastError'),
  linkKind: reader.oneOf(from.linkKind, LINK_KINDS, 'linkKind'),
  withoutAgent: reader.whole(from.withoutAgent, COUNT, 'withoutAgent'),
  source: from.source === null ? null : reader.object(from.source, sourceOf, 'source'),
  weakestWeight:
    from.weakestWeight === null ? null : reader.number(from.weakestWeight, SHARE, 'weakestWeight'),
  meanWeight: from.meanWeight === null ? null : reader.number(from.meanWeight, SHARE, 'meanWeight'),
  keyRing: reader.whole(from.keyRing, COUNT, 'keyRing'),
  refused: reader.whole(from.refused, COUNT, 'refused'),
  upgrade: from.upgrade === null ? null : reader.object(from.upgrade, upgradeOf, 'upgrade'),
})

const nodeFactsOf = (from: Unread<NodeFacts>, reader: ObjectReader): NodeFacts => ({
  degree: reader.whole(from.degree, COUNT, 'degree'),
  weightedDegree: reader.number(from.weightedDegree, NOT_NEGATIVE, 'weightedDegree'),
  linksKnown: reader.whole(from.linksKnown, COUNT, 'linksKnown'),
  value: from.value === null ? null : reader.object(from.value, fiedlerOf, 'value'),
  links: reader.objects(from.links, MAX_REPORT_LINKS, linkOf, 'links'),
  version: reader.text(from.version, NAME, 'version'),
  uptimeSeconds: reader.number(from.uptimeSeconds, NOT_NEGATIVE, 'uptimeSeconds'),
  ...(from.skills !== undefined && { skills: reader.texts(from.skills, MAX_SKILLS, NAME, 'skills') }),
  ...(from.health !== undefined && { health: reader.object(from.health, healthOf, 'health') }),
})

export const nodeFactsSchema = objectReadBy(nodeFactsOf)
