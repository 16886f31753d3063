import type { ReactNode } from 'react'
import type { CsvValue } from '@/lib/face/csv'

export interface Column<Row> {
  id: string
  /** Plain words: stands above the column and in the CSV. */
  header: string
  /** Shown in place of `header` where plain text will not do. */
  heading?: ReactNode
  /** What is sorted, searched and exported. Null sorts last either way. */
  value: (row: Row) => CsvValue
  /** What is shown, where it is more than the value as text. */
  cell?: (row: Row) => ReactNode
  /** Figures are set in the mono family, to the right. */
  figures?: boolean
  /** Longer text: keeps a readable width where the table scrolls sideways. */
  words?: boolean
  /** False for what is searched and exported but has no column of its own: there is not room for everything. */
  shown?: boolean
  /** True for what a narrow screen leaves out: a row must then say it elsewhere. */
  roomy?: boolean
  /** False for a column of buttons: neither sorted, searched nor exported. */
  data?: boolean
}

export interface TableFilter<Row> {
  id: string
  label: string
  options: readonly { value: string; label: string }[]
  match: (row: Row, value: string) => boolean
}

export interface DataTableProps<Row> {
  /** Says what the rows are; read out before the table. */
  caption: string
  columns: readonly Column<Row>[]
  rows: readonly Row[]
  rowKey: (row: Row) => string
  /** Base of the CSV's file name; leave out for no export. */
  csvName?: string
  initialSort?: { id: string; descending?: boolean }
  /** Label of the text filter; leave out for none. */
  search?: string
  filters?: readonly TableFilter<Row>[]
  /** On a narrow screen each row becomes a block, its cells below each other, so that buttons are in sight. */
  stacks?: boolean
  /** Shown instead of the table when there are no rows at all. */
  empty: ReactNode
}
