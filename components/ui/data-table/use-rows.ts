'use client'

import {
  type ColumnDef,
  createSortedRowModel,
  rowSortingFeature,
  type SortingState,
  tableFeatures,
  useTable,
} from '@tanstack/react-table'
import { useMemo, useState } from 'react'
import { compareCells } from '@/lib/face/sort'
import type { Column, DataTableProps } from './types'

const features = tableFeatures({ rowSortingFeature, sortedRowModel: createSortedRowModel() })

export type ChosenFilters = Readonly<Record<string, string>>

/** The table's own state: what is sought, chosen and sorted, and the rows that follow from it. */
export function useRows<Row extends object>(props: DataTableProps<Row>) {
  const { columns, rows, filters, initialSort } = props
  const [text, setText] = useState('')
  const [chosen, setChosen] = useState<ChosenFilters>({})
  const [sorting, setSorting] = useState<SortingState>(
    initialSort ? [{ id: initialSort.id, desc: initialSort.descending ?? false }] : [],
  )

  const found = useMemo(() => {
    const words = text.toLowerCase().split(/\s+/).filter(Boolean)
    return rows.filter(
      (row) =>
        words.every((word) => haystack(columns, row).includes(word)) &&
        (filters ?? []).every((f) => !chosen[f.id] || f.match(row, chosen[f.id] ?? '')),
    )
  }, [columns, rows, filters, text, chosen])

  const definitions = useMemo(() => columns.map((c) => definition(c)), [columns])
  const table = useTable({
    features,
    columns: definitions,
    data: found,
    state: { sorting },
    onSortingChange: setSorting,
    getRowId: props.rowKey,
    enableSortingRemoval: false,
    enableMultiSort: false,
    autoResetAll: false,
  })

  return { table, text, setText, chosen, setChosen, found }
}

function definition<Row extends object>(column: Column<Row>): ColumnDef<typeof features, Row> {
  return {
    id: column.id,
    header: column.header,
    accessorFn: (row) => column.value(row) ?? undefined,
    enableSorting: column.data !== false,
    sortDescFirst: false,
    // Nothing known stays last in either order.
    sortUndefined: 'last',
    sortFn: (a, b) => compareCells(column.value(a.original), column.value(b.original)),
  }
}

function haystack<Row>(columns: readonly Column<Row>[], row: Row): string {
  return columns
    .filter((c) => c.data !== false)
    .map((c) => String(c.value(row) ?? ''))
    .join('\n')
    .toLowerCase()
}
