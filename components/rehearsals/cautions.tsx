import { Note } from '@/components/ui'

/** What no rehearsal can see. */
export function RehearsalCautions() {
  return (
    <Note className="max-w-4xl">
      In a rehearsal only walkers are kept away: no data moves, no load shifts to what remains, and cables,
      power or hosts that links share are not seen. It answers for the links as they are while it runs; what
      changes later is not in it, so rehearse again right before the work. Nothing real is taken away, and the
      live reading goes on beside it.
    </Note>
  )
}
