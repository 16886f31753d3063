import { z } from 'zod'
import type { StatusReport } from './status-command'

/** What the agent that runs says at /status, as far as a person is told of it. */
export const runningStatusSchema = z.looseObject({
  agentId: z.string(),
  version: z.string(),
  uptimeSeconds: z.number(),
  frozen: z.boolean(),
  clockSkewMs: z.number(),
  reports: z.object({
    delivered: z.number(),
    failed: z.number(),
    lastDeliveredMsAgo: z.number().nullable(),
    lastError: z.string().nullable(),
  }),
  ticks: z.object({ count: z.number(), late: z.number() }),
  links: z.array(
    z.looseObject({
      peer: z.string().nullable(),
      name: z.string().nullable(),
      address: z.string().nullable(),
      state: z.string(),
      up: z.boolean(),
      heardMsAgo: z.number().nullable(),
    }),
  ),
  source: z.object({ kind: z.string(), error: z.string().nullable(), withoutAgent: z.number() }).nullable(),
})
export type RunningStatus = z.infer<typeof runningStatusSchema>

/** For a person: what is right in a line, what is wrong with its reason. */
export function statusLines(status: StatusReport, isAsked: boolean): string[] {
  const { collector, running } = status
  const known = collector.knowsThisAgent
    ? `knows this agent (clocks differ by ${seconds(Math.abs(collector.clockSkewMs ?? 0))})`
    : (collector.problem ?? 'unknown')
  return [
    `${status.name} in ${status.overlay.name}`,
    `Agent id    ${status.agentId}`,
    `Collector   ${collector.address}: ${known}`,
    `Pace        ${status.pace.name}`,
    `Listens     ${status.listen ? `${status.listen.host}:${status.listen.port}` : 'no, it only dials'}`,
    `Address     ${status.address ?? 'none: nobody can dial it'}`,
    `Neighbours  ${neighbourWords(status)}`,
    `Pass until  ${status.passExpiresAt}`,
    ...(running
      ? runningLines(running)
      : [
          `Running     ${isAsked ? 'does not answer at its metrics port' : 'not asked: no --metrics port is configured'}`,
        ]),
  ]
}

function neighbourWords({ source, neighbours, agentsAt }: StatusReport): string {
  const listed = neighbours.length > 0 ? [`${neighbours.length} given`] : []
  const learnt = source ? [`learnt by ${source.kind}, agents at ${agentsAt}`] : []
  return [...listed, ...learnt].join('; ') || 'none given: others dial this agent'
}

function runningLines(running: RunningStatus): string[] {
  const { reports, links, source } = running
  const up = links.filter((link) => link.up)
  const lines = [
    `Running     version ${running.version}, for ${seconds(running.uptimeSeconds * 1000)}${running.frozen ? '; frozen: no fresh orders' : ''}`,
    `Reports     ${reports.delivered} delivered, ${reports.failed} failed, the last ${reports.lastDeliveredMsAgo === null ? 'never' : `${seconds(reports.lastDeliveredMsAgo)} ago`}`,
    `Links       ${up.length} of ${links.length} up`,
    ...links
      .filter((link) => !link.up)
      .map((link) => `  down      ${link.name ?? link.address ?? link.peer ?? 'unknown'}`),
  ]
  if (reports.lastError) lines.push(`Last error  ${reports.lastError}`)
  if (source?.error) lines.push(`Source      ${source.kind}: ${source.error}`)
  if (source && source.withoutAgent > 0)
    lines.push(`No agent    known beside ${source.withoutAgent} neighbours`)
  return lines
}

function seconds(ms: number): string {
  if (ms < 10_000) return `${(ms / 1000).toFixed(1)} s`
  if (ms < 120_000) return `${Math.round(ms / 1000)} s`
  return ms < 7_200_000 ? `${Math.round(ms / 60_000)} min` : `${Math.round(ms / 3_600_000)} h`
}
