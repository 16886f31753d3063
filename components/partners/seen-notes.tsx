import { Sheet } from '@/components/ui'

const NOTES = [
  [
    'What all teams see',
    'The reading and its history, how many nodes stand on each side of the weak cut and how many links cross it, how many agents are heard, that nodes join, leave and fall silent.',
  ],
  [
    'What stays with each team',
    'The names, labels, addresses, versions and faults of its nodes, its joining codes and upgrades, its rules, incidents and who is told of them, its audit log.',
  ],
  [
    'What a name that is made up does not hide',
    'A team that knows a neighbour’s node by other means can tell which one it is from how it behaves; so can two teams that compare what they see. Agents of linked nodes know each other’s names and addresses.',
  ],
] as const

export function SeenNotes() {
  return (
    <Sheet heading="Who sees what">
      <dl className="max-w-3xl space-y-3">
        {NOTES.map(([heading, text]) => (
          <div key={heading}>
            <dt className="font-semibold">{heading}</dt>
            <dd className="text-soft">{text}</dd>
          </div>
        ))}
      </dl>
    </Sheet>
  )
}
