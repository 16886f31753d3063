'use client'

import { useSearchParams } from 'next/navigation'
import { RANGE_PARAMETER } from '@/components/trend/trend-sheet'
import { DEFAULT_RANGE, type Range, rangeNamed } from '@/lib/face/range'

/** The range that the address names. */
export function useRange(): Range {
  return rangeNamed(useSearchParams().get(RANGE_PARAMETER)) ?? DEFAULT_RANGE
}
