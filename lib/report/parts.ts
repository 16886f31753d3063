import type { StretchLayout } from '@/lib/face/stretch'

/** What a report is made of, from top to bottom: decided first, then printed. */
export type Part =
  | { is: 'title'; above: string; text: string }
  | { is: 'block'; rows: readonly (readonly [label: string, value: string])[] }
  | { is: 'heading'; text: string }
  | { is: 'text'; text: string }
  | { is: 'note'; text: string }
  | { is: 'table'; columns: readonly TableColumn[]; rows: readonly (readonly string[])[]; empty: string }
  | { is: 'drawing'; layout: StretchLayout; caption: string }

export interface TableColumn {
  header: string
  /** Part of the width; those of a table sum to 1. */
  share: number
  figures?: boolean
}

export interface Report {
  title: string
  madeAt: Date
  parts: readonly Part[]
}
