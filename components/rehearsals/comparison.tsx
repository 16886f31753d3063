import type { ReactNode } from 'react'
import { Lambda, SideMark } from '@/components/ui'
import type { Reading } from '@/lib/data/dto'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { cx } from '@/lib/face/cx'
import { type Compared, compared, isOpen } from '@/lib/face/rehearsal'

const LABELS: Record<Compared['id'], ReactNode> = {
  reading: (
    <>
      reading <Lambda n={2} />
    </>
  ),
  level: 'level',
  nodes: 'nodes',
  sides: 'sides',
  crossing: 'crossing links',
}

/** The overlay as it is, beside what would be left of it. Rows stand from the beginning, so that nothing moves. */
export function Comparison({ rehearsal, beside }: { rehearsal: RehearsalDto; beside: Reading | null }) {
  return (
    <table className="w-full max-w-3xl border-collapse border border-ink bg-sheet text-left">
      <caption className="sr-only">The overlay as it is beside what would be left of it</caption>
      <thead>
        <tr className="border-b border-ink text-sm text-soft">
          <td className="w-[26%] px-3 py-1.5" />
          <th scope="col" className="w-[37%] px-3 py-1.5 font-normal">
            live, beside it
          </th>
          <th scope="col" className="px-3 py-1.5 font-normal">
            {rehearsal.answer !== null
              ? 'as it would be'
              : isOpen(rehearsal)
                ? 'as it would be, so far'
                : 'last seen of it'}
          </th>
        </tr>
      </thead>
      <tbody>
        {compared(rehearsal, beside).map(({ id, live, would, liveRemark, wouldRemark, grave }) => (
          <tr key={id} className="border-b border-hairline align-baseline last:border-b-0">
            <th scope="row" className="px-3 py-2 text-sm font-normal text-soft">
              {LABELS[id]}
            </th>
            <Cell main={id === 'reading'} remark={liveRemark}>
              {id === 'sides' ? <Sides sides={beside?.sides ?? null} none={live} /> : live}
            </Cell>
            <Cell main={id === 'reading'} remark={wouldRemark} grave={grave}>
              {id === 'sides' ? <Sides sides={rehearsal.sides} none={would} /> : would}
            </Cell>
          </tr>
        ))}
      </tbody>
    </table>
  )
}

function Cell(props: { main: boolean; remark: string | null; grave?: boolean; children: ReactNode }) {
  const { main, remark, grave, children } = props
  return (
    <td className="px-3 py-2">
      <span
        className={cx(
          'block font-figures leading-tight break-words',
          main ? 'text-2xl sm:text-3xl' : 'text-lg',
          grave && 'text-vermilion',
        )}
      >
        {children ?? '–'}
      </span>
      {main || remark ? <span className="block min-h-5 text-sm leading-5 text-soft">{remark}</span> : null}
    </td>
  )
}

function Sides({ sides, none }: { sides: RehearsalDto['sides']; none: string | null }) {
  if (!sides) return <>{none ?? '–'}</>
  return (
    <span className="flex flex-wrap gap-x-5">
      {sides.map(({ name, nodes }) => (
        <SideMark key={name} side={name}>
          {name} {nodes}
        </SideMark>
      ))}
    </span>
  )
}
