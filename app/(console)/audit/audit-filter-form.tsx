import { buttonClass, LinkButton, SelectField, TextField } from '@/components/ui'
import type { AuditFilter } from '@/lib/data'
import { ACTION_WORDS, OUTCOME_WORDS } from './words'

const any = { value: '', label: 'Any' }
const options = (words: Record<string, string>) => [
  any,
  ...Object.entries(words).map(([value, label]) => ({ value, label })),
]

/** A plain GET form: the filter is in the address and can be kept or passed on. */
export function AuditFilterForm({ filter, team }: { filter: AuditFilter; team: string }) {
  return (
    <form method="get" action="/audit" className="mb-5 flex flex-wrap items-end gap-4">
      <input type="hidden" name="team" value={team} />
      <TextField label="Who or what" name="text" type="search" defaultValue={filter.text} className="w-60" />
      <SelectField
        label="Action"
        name="action"
        options={options(ACTION_WORDS)}
        defaultValue={filter.action ?? ''}
        className="w-64"
      />
      <SelectField
        label="Outcome"
        name="outcome"
        options={options(OUTCOME_WORDS)}
        defaultValue={filter.outcome ?? ''}
        className="w-36"
      />
      <button type="submit" className={buttonClass('plain')}>
        Filter
      </button>
      {filter.text || filter.action || filter.outcome ? (
        <LinkButton kind="quiet" href={`/audit?team=${team}`}>
          Clear
        </LinkButton>
      ) : null}
    </form>
  )
}
