import { type Column, Mark, SideMark, type TableFilter, Time } from '@/components/ui'
import { NODE_STATES, type OverlayNode } from '@/lib/data/dto'
import { cx } from '@/lib/face/cx'
import { formatValue } from '@/lib/face/format'
import { linkKindWords } from '@/lib/face/link-kind'
import { hasLabel, labelChoices, labelKeysOf, labelText, MAX_LABEL_COLUMNS } from '@/lib/face/node-columns'
import { nodeConcerns } from '@/lib/face/node-concerns'
import { linksText } from '@/lib/face/node-details'
import { STATE_WORDS, StateMark } from './state-mark'

/** Names up to this many characters stay on one line beside what else a narrow screen shows. */
const SHORT_NAME = 14

type NodeColumn = Column<OverlayNode>

/** What an operator needs at three in the morning, on a telephone less; the rest is in the node's sheet and in the CSV. */
export function nodeColumns(nodes: readonly OverlayNode[], open: (name: string) => void): NodeColumn[] {
  return [
    {
      id: 'name',
      header: 'name',
      value: (n) => n.name,
      cell: (n) => (
        <button
          type="button"
          aria-label={`${n.name}: details`}
          onClick={() => open(n.name)}
          className={cx(
            'rule-link min-h-6 text-left font-medium pointer-coarse:min-h-11',
            n.name.length <= SHORT_NAME
              ? 'whitespace-nowrap'
              : n.partner
                ? 'sm:whitespace-nowrap'
                : 'wrap-anywhere',
          )}
        >
          {n.name}
        </button>
      ),
    },
    {
      id: 'state',
      header: 'state',
      value: (n) => STATE_WORDS[n.state],
      cell: (n) => <StateMark state={n.state} />,
    },
    ...teamColumn(nodes),
    ...labelColumns(nodes),
    {
      id: 'side',
      roomy: true,
      header: 'side',
      value: (n) => n.side,
      cell: (n) => (n.side ? <SideMark side={n.side}>{n.side}</SideMark> : '–'),
    },
    {
      id: 'links',
      roomy: true,
      header: 'links',
      figures: true,
      value: (n) => n.degree,
      cell: (n) => linksText(n) ?? '–',
    },
    {
      id: 'weakest',
      roomy: true,
      header: 'weakest link',
      figures: true,
      value: (n) => n.health?.weakestWeight ?? null,
      cell: (n) => n.health?.weakestWeight?.toFixed(2) ?? '–',
    },
    {
      id: 'heard',
      roomy: true,
      header: 'last heard',
      value: (n) => n.heardAt,
      cell: (n) => <span className="whitespace-nowrap">{n.heardAt ? <Time at={n.heardAt} /> : 'never'}</span>,
    },
    {
      id: 'concerns',
      header: 'to look at',
      words: true,
      value: (n) => nodeConcerns(n).join('; ') || null,
      cell: (n) => <Concerns concerns={nodeConcerns(n)} />,
    },
    ...UNSHOWN,
  ]
}

/** Only where there are nodes of other teams. */
function teamColumn(nodes: readonly OverlayNode[]): NodeColumn[] {
  if (!nodes.some(({ partner }) => partner)) return []
  return [
    {
      id: 'whose',
      roomy: true,
      header: 'whose',
      value: (n) => (n.partner ? 'a partner’s' : 'yours'),
      cell: (n) => (n.partner ? <Mark shape="hollow">a partner’s</Mark> : <Mark shape="full">yours</Mark>),
    },
  ]
}

function Concerns({ concerns }: { concerns: readonly string[] }) {
  const [first, ...more] = concerns
  if (first === undefined) return '–'
  return (
    <>
      {first}
      {more.length > 0 ? <span className="text-soft"> and {more.length} more</span> : null}
    </>
  )
}

function labelColumns(nodes: readonly OverlayNode[]): NodeColumn[] {
  const keys = labelKeysOf(nodes)
  const together: NodeColumn = {
    id: 'labels',
    roomy: true,
    header: 'labels',
    value: (n) => labelText(n.labels) || null,
  }
  if (keys.length === 0 || keys.length > MAX_LABEL_COLUMNS) return [together]
  // As key=value it can be searched for all the same.
  return [
    ...keys.map((key) => ({
      id: `label:${key}`,
      roomy: true,
      header: key,
      value: (n: OverlayNode) => n.labels[key] ?? null,
    })),
    { ...together, shown: false },
  ]
}

const UNSHOWN: NodeColumn[] = [
  unshown('value', 'Fiedler value', (n) =>
    n.value === null ? null : Number(formatValue(n.value).replace('−', '-')),
  ),
  unshown('delivered', 'delivered over all links', (n) => n.weightedDegree),
  unshown('mean', 'mean weight', (n) => n.health?.meanWeight ?? null),
  unshown('known', 'links known', (n) => n.health?.linksKnown ?? null),
  unshown('without', 'neighbours without an agent', (n) => n.health?.withoutAgent ?? null),
  unshown('version', 'version', (n) => n.version),
  unshown('uptime', 'uptime in seconds', (n) => n.health?.uptimeSeconds ?? null),
  unshown('skew', 'clock slow by ms', (n) => n.health?.clockSkewMs ?? null),
  unshown('report', 'report took ms', (n) => n.health?.reportTookMs ?? null),
  unshown('failed', 'reports failed', (n) => n.health?.reportsFailed ?? null),
  unshown('audit', 'audit off by walkers', (n) => n.health?.auditImbalance ?? null),
  unshown('kind', 'what is measured', (n) => linkKindWords(n.health?.linkKind)?.short ?? null),
  unshown('relayed', 'through neighbours', (n) =>
    n.relayed === undefined ? null : n.relayed ? 'yes' : 'no',
  ),
  unshown('node', 'known to the overlay as', (n) => n.node ?? null),
  unshown('error', 'last error', (n) => n.health?.lastError ?? null),
]

function unshown(id: string, header: string, value: NodeColumn['value']): NodeColumn {
  return { id, header, value, shown: false }
}

export function nodeFilters(nodes: readonly OverlayNode[]): TableFilter<OverlayNode>[] {
  const option = (value: string) => ({ value, label: value })
  const labels = labelChoices(nodes)
  return [
    {
      id: 'state',
      label: 'state',
      options: NODE_STATES.map((value) => ({ value, label: STATE_WORDS[value] })),
      match: (n, value) => n.state === value,
    },
    ...(nodes.some(({ partner }) => partner)
      ? [
          {
            id: 'whose',
            label: 'whose',
            options: ['yours', 'a partner’s'].map(option),
            match: (n: OverlayNode, value: string) => (n.partner ? 'a partner’s' : 'yours') === value,
          },
        ]
      : []),
    ...(labels.length > 0
      ? [{ id: 'label', label: 'label', options: labels.map(option), match: hasLabel }]
      : []),
  ]
}
