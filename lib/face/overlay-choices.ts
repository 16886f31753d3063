import type { Choice } from '@/components/ui'
import type { WEIGHTS } from '@/lib/data/dto'
import type { DISCLOSURES } from '@/lib/method/orders'
import { PACES, type PaceName } from '@/lib/method/pace'
import { firstReadingSeconds } from './expect'
import { formatDuration } from './time'

type ChoiceOf<T extends string> = Choice & { value: T }

function paceMeaning(pace: PaceName, meant: string): string {
  const { low, high } = firstReadingSeconds(pace)
  const every = formatDuration(PACES[pace].intervalMs / 1000)
  return `For ${meant}. Agents report every ${every}; a first reading takes about ${low} to ${high} s.`
}

export const PACE_CHOICES: readonly ChoiceOf<PaceName>[] = [
  { value: 'calm', label: 'Calm', meaning: paceMeaning('calm', 'thousands of nodes, or little to spare') },
  { value: 'steady', label: 'Steady', meaning: paceMeaning('steady', 'up to about a thousand nodes') },
  { value: 'brisk', label: 'Brisk', meaning: paceMeaning('brisk', 'up to about two hundred nodes') },
]

export const DISCLOSURE_CHOICES: readonly ChoiceOf<(typeof DISCLOSURES)[number]>[] = [
  {
    value: 'sealed',
    label: 'Sealed',
    meaning:
      'No link is ever named. The page says how many links hold the sides together, not which; on which side a node lies is said.',
  },
  {
    value: 'flagged',
    label: 'Flagged',
    meaning: 'A link is named only when it carries much of the reading, and only if both its ends consent.',
  },
  {
    value: 'named',
    label: 'Named',
    meaning:
      'Every link is named, with what it delivers and its share of the reading. For one owner’s own overlay.',
  },
]

export const WEIGHT_CHOICES: readonly ChoiceOf<(typeof WEIGHTS)[number]>[] = [
  {
    value: 'delivered',
    label: 'What it delivers',
    meaning: 'A link counts for the share of its frames that arrive in time: slow decay shows early.',
  },
  { value: 'unit', label: 'All alike', meaning: 'A link counts 1 while it stands and 0 when it is gone.' },
]
