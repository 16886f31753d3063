export { DataTable } from './data-table'
export type { Column, DataTableProps, TableFilter } from './types'
