'use client'

import { CommandBlock, Note } from '@/components/ui'
import { joiningCommands, onlyThisMachine, PLACEHOLDERS } from '@/lib/face/joining-commands'
import { useOrigin } from './use-origin'

/** What to type beside a node, with this page's own address and, when it was just made, the code. */
export function Commands({ code }: { code: string | null }) {
  const origin = useOrigin()
  const shown = origin ?? 'https://…'
  return (
    <div className="space-y-4">
      <p className="max-w-2xl text-soft">
        From a copy of Thinspan’s folder on the node’s machine, after{' '}
        <code className="font-figures whitespace-nowrap">npm ci</code>. Labels such as{' '}
        <code className="font-figures whitespace-nowrap">--label harbour=Tarnwick</code> make the lanes of the
        drawing.
      </p>
      {joiningCommands({ origin: shown, code }).map((c) => (
        <CommandBlock key={c.id} label={c.label} text={c.text} />
      ))}
      <dl className="text-sm">
        {[
          ...PLACEHOLDERS,
          ...(code ? [] : [{ name: 'CODE', meaning: 'a joining code that is still open' }]),
        ].map((p) => (
          <div key={p.name} className="flex gap-3 py-0.5">
            <dt className="w-16 shrink-0 font-figures">{p.name}</dt>
            <dd className="text-soft">{p.meaning}</dd>
          </div>
        ))}
      </dl>
      {origin && onlyThisMachine(origin) ? (
        <Note>
          {origin} reaches this server from this machine only. For agents elsewhere, open this page under the
          address they can reach, or put it in place of {origin}.
        </Note>
      ) : null}
    </div>
  )
}
