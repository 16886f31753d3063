import type { ReactNode } from 'react'
import { CommandBlock } from '@/components/ui'
import { cx } from '@/lib/face/cx'
import type { Command } from '@/lib/face/joining'

export function CommandBlocks({ commands }: { commands: readonly Command[] }) {
  return (
    <div className="space-y-3">
      {commands.map((c) => (
        <CommandBlock key={c.id} label={c.label} text={c.text} />
      ))}
    </div>
  )
}

/** Terms with what they mean; one below the other on narrow screens. */
export function Terms({ terms }: { terms: readonly { term: ReactNode; meaning: ReactNode }[] }) {
  return (
    <dl className="max-w-4xl text-sm">
      {terms.map(({ term, meaning }, index) => (
        <div key={index} className="border-t border-hairline py-2 first:border-t-0 sm:flex sm:gap-5">
          <dt className="shrink-0 font-medium sm:w-52">{term}</dt>
          <dd className="min-w-0 text-soft">{meaning}</dd>
        </div>
      ))}
    </dl>
  )
}

/** A few words that are typed, within a sentence. */
export function Typed({ children }: { children: string }) {
  const breaks = children.length > SHORT ? 'wrap-anywhere' : 'whitespace-nowrap'
  return <code className={cx('font-figures text-[0.92em] text-ink', breaks)}>{children}</code>
}

/** Up to this many characters are kept on one line. */
const SHORT = 24

export function Lead({ children }: { children: ReactNode }) {
  return <p className="max-w-3xl text-soft">{children}</p>
}
