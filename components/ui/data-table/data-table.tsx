'use client'

import { type ReactNode, useState } from 'react'
import { csvFileName, toCsv } from '@/lib/face/csv'
import { cx } from '@/lib/face/cx'
import { formatCount } from '@/lib/face/format'
import { Button } from '../button'
import { saveText } from '../save-text'
import { Filters } from './filters'
import type { Column, DataTableProps } from './types'
import { useRows } from './use-rows'

/** Rows drawn at first; the rest are one press away, so that thousands do not hold up the page. */
const FIRST_ROWS = 200

export function DataTable<Row extends object>(props: DataTableProps<Row>) {
  const { columns, rows, csvName, stacks = false } = props
  const { table, text, setText, chosen, setChosen } = useRows(props)
  const [all, setAll] = useState(false)

  if (rows.length === 0) return <>{props.empty}</>

  const sorted = table.getRowModel().rows
  const shown = all ? sorted : sorted.slice(0, FIRST_ROWS)
  const byId = new Map(columns.map((c) => [c.id, c]))

  function exportCsv() {
    const data = columns.filter((c) => c.data !== false)
    saveText(
      csvFileName(csvName ?? 'table'),
      'text/csv;charset=utf-8',
      toCsv(
        data.map((c) => c.header),
        sorted.map((r) => data.map((c) => c.value(r.original))),
      ),
    )
  }

  return (
    <div>
      <Filters
        {...props}
        text={text}
        onText={setText}
        chosen={chosen}
        onChosen={setChosen}
        found={sorted.length}
        actions={
          csvName ? (
            <Button kind="quiet" className="-mr-2" onClick={exportCsv}>
              Save as CSV
            </Button>
          ) : null
        }
      />
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: a scrolling region must be reachable by keyboard */}
      <section aria-label={props.caption} tabIndex={0} className="relative overflow-x-auto">
        <table className={cx('w-full border-collapse text-left', stacks && 'max-sm:block')}>
          <caption className="sr-only">{props.caption}</caption>
          <thead className={cx(stacks && 'max-sm:block')}>
            {table.getHeaderGroups().map((group) => (
              <tr
                key={group.id}
                className={cx('border-b border-ink', stacks && 'max-sm:flex max-sm:flex-wrap')}
              >
                {group.headers.map((header) => {
                  const column = byId.get(header.column.id)
                  return column && isShown(column) ? (
                    <HeaderCell
                      key={header.id}
                      column={column}
                      sorted={header.column.getIsSorted()}
                      onSort={header.column.getToggleSortingHandler()}
                    />
                  ) : null
                })}
              </tr>
            ))}
          </thead>
          <tbody className={cx(stacks && 'max-sm:block')}>
            {shown.map((row) => (
              <tr
                key={row.id}
                className={cx('border-b border-hairline', stacks && 'max-sm:block max-sm:py-3')}
              >
                {columns.filter(isShown).map((c) => (
                  <td
                    key={c.id}
                    className={cx(
                      'py-2 pr-5 align-baseline last:pr-0',
                      c.figures && 'text-right font-figures whitespace-nowrap',
                      c.words && 'sm:min-w-56',
                      c.roomy && 'max-sm:hidden',
                      stacks && 'max-sm:flex max-sm:gap-3 max-sm:py-1 max-sm:pr-0 max-sm:text-left',
                    )}
                  >
                    {stacks && c.data !== false ? (
                      <span
                        aria-hidden="true"
                        className="hidden w-28 shrink-0 font-text text-sm whitespace-normal text-soft max-sm:inline"
                      >
                        {c.heading ?? c.header}
                      </span>
                    ) : null}
                    <Cell stacks={stacks}>
                      {c.cell ? c.cell(row.original) : (c.value(row.original) ?? '–')}
                    </Cell>
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </section>
      {sorted.length === 0 ? (
        <p className="py-4 text-soft">
          Nothing matches. Change or clear the filter to see all {rows.length}.
        </p>
      ) : null}
      {shown.length < sorted.length ? (
        <div className="mt-3">
          <Button onClick={() => setAll(true)}>
            Show all {formatCount(sorted.length, 'row')} ({shown.length} shown)
          </Button>
        </div>
      ) : null}
    </div>
  )
}

const isShown = <Row,>(column: Column<Row>): boolean => column.shown !== false

/** One box beside the cell's name, whatever the cell is made of. */
function Cell({ stacks, children }: { stacks: boolean; children: ReactNode }) {
  return stacks ? <div className="min-w-0 max-sm:wrap-anywhere">{children}</div> : children
}

function HeaderCell<Row>({
  column,
  sorted,
  onSort,
}: {
  column: Column<Row>
  sorted: false | 'asc' | 'desc'
  onSort: ((event: unknown) => void) | undefined
}) {
  const end = column.figures
  if (column.data === false) {
    return (
      <th scope="col" className="pb-1.5">
        <span className="sr-only">{column.header}</span>
      </th>
    )
  }
  return (
    <th
      scope="col"
      aria-sort={sorted === 'asc' ? 'ascending' : sorted === 'desc' ? 'descending' : undefined}
      className={cx(
        'pr-5 pb-1 align-bottom font-normal last:pr-0',
        end && 'text-right',
        column.roomy && 'max-sm:hidden',
      )}
    >
      <button
        type="button"
        onClick={onSort}
        className="inline-flex min-h-8 items-center gap-1 text-sm whitespace-nowrap text-soft hover:text-ink"
      >
        {column.heading ?? column.header}
        <svg viewBox="0 0 8 12" className="h-3 w-2 shrink-0" aria-hidden="true">
          <path
            d="M1 4.5L4 1l3 3.5"
            fill="none"
            stroke="currentColor"
            opacity={sorted === 'asc' ? 1 : 0.25}
          />
          <path
            d="M1 7.5L4 11l3-3.5"
            fill="none"
            stroke="currentColor"
            opacity={sorted === 'desc' ? 1 : 0.25}
          />
        </svg>
      </button>
    </th>
  )
}
