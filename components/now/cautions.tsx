import { Note } from '@/components/ui'

/** What the reading does not say. Part of the product, not small print. */
export function Cautions() {
  return (
    <Note className="max-w-4xl">
      <h2 className="mb-1 font-text text-sm font-semibold text-ink">What this does not say</h2>
      <p>
        The reading describes the links that agents measure, not the cables and the power they share. An agent
        measures the path beside the overlay’s own connections, unless frames ride on them: then it is the
        connection itself. Below full coverage a false calm is possible. Intervals are sampling noise only.
        Never make this the only safeguard where an outage can hurt people; local rules and qualified staff
        come first.
      </p>
    </Note>
  )
}
