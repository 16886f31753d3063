import type { Metadata } from 'next'
import { Rehearsals } from '@/components/rehearsals/rehearsals'
import { ProblemState } from '@/components/ui'
import { getOverlay } from '@/lib/data'
import { prefillOf } from '@/lib/face/rehearsal'
import { page } from '@/lib/http'
import { cancelRehearsalAction, startRehearsalAction } from './actions'

export const metadata: Metadata = { title: 'Rehearsals' }

export default async function RehearsalsPage(props: {
  params: Promise<{ slug: string }>
  searchParams: Promise<Record<string, string | string[] | undefined>>
}) {
  const { slug } = await props.params
  const asked = await props.searchParams
  const overlay = await page('overlay.read', (call) => getOverlay(call, slug), slug)
  if (!overlay.ok) return <ProblemState problem={overlay.problem} />
  return (
    <Rehearsals
      // A link from another page asks anew.
      key={JSON.stringify(asked)}
      slug={slug}
      disclosure={overlay.value.disclosure}
      prefill={prefillOf(asked)}
      actions={{ start: startRehearsalAction, cancel: cancelRehearsalAction }}
    />
  )
}
