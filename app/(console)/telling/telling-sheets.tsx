import { CallOrdersSheet } from '@/components/telling/call-orders-sheet'
import { ChannelsSheet } from '@/components/telling/channels-sheet'
import { DeliveryLog } from '@/components/telling/delivery-log'
import { TurnsSheet } from '@/components/telling/turns-sheet'
import { WebhooksSheet } from '@/components/telling/webhooks-sheet'
import { FailedState, Note, Sheet, Waiting } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import { getTelling, listChannels, listWebhooks } from '@/lib/data'
import { toldNow, watcherNow } from '@/lib/face/telling'
import { page } from '@/lib/http'
import { TeamChoice } from '../team/team-choice'
import * as actions from './actions'

export async function TellingSheets({ team }: { team: string | undefined }) {
  const result = await page('turn.list', (call) => getTelling(call, team))
  if (!result.ok) return <FailedState title={result.problem.title}>{result.problem.detail}</FailedState>
  const telling = result.value
  const changes = roleReaches(telling.role, 'operator')
  return (
    <div className="space-y-6">
      <TeamChoice path="/telling" chosen={telling.team.slug} />
      <div className="max-w-3xl space-y-2 text-lg">
        {toldNow(telling).map((sentence) => (
          <p key={sentence}>{sentence}</p>
        ))}
      </div>
      <Note>
        A message can be late or lost on its way. Never let a warning be the only safeguard where an outage
        can hurt people; local rules and qualified staff come first.
      </Note>
      <OwnChannels />
      <TurnsSheet telling={telling} changes={changes} actions={actions} />
      <CallOrdersSheet telling={telling} changes={changes} actions={actions} />
      {changes ? <Webhooks team={telling.team.slug} owner={telling.role === 'owner'} /> : null}
      <Sheet heading="Who watches the watcher">
        <div className="max-w-3xl space-y-2">
          {watcherNow(telling).map((sentence) => (
            <p key={sentence}>{sentence}</p>
          ))}
        </div>
      </Sheet>
      <DeliveryLog team={telling.team.slug} retry={actions.retryDeliveryAction} />
    </div>
  )
}

async function OwnChannels() {
  const result = await page('channel.list', listChannels)
  if (!result.ok)
    return (
      <Sheet heading="My channels">
        <FailedState quiet title={result.problem.title}>
          {result.problem.detail}
        </FailedState>
      </Sheet>
    )
  return <ChannelsSheet channels={result.value} actions={actions} />
}

async function Webhooks({ team, owner }: { team: string; owner: boolean }) {
  const result = await page('webhook.list', (call) => listWebhooks(call, team), team)
  if (!result.ok)
    return (
      <Sheet heading="Webhooks">
        <FailedState quiet title={result.problem.title}>
          {result.problem.detail}
        </FailedState>
      </Sheet>
    )
  return <WebhooksSheet team={team} webhooks={result.value} actions={owner ? actions : null} />
}

export function TellingSkeleton() {
  return <Waiting label="Who is told is being loaded." className="h-96" />
}
