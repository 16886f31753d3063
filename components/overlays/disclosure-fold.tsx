import { Fold } from '@/components/ui'
import { disclosureWords, type WordsFor } from '@/lib/face/disclosure-words'

/** What an overlay keeps to itself, and what can be known of it all the same. Nothing where all links are named. */
export function DisclosureFold({ disclosure }: { disclosure: WordsFor }) {
  const words = disclosureWords(disclosure)
  if (!words) return null
  return (
    <Fold heading={words.heading}>
      <p className="max-w-3xl">{words.protects}</p>
      <div className="max-w-3xl">
        <p className="mb-1 font-semibold">Known all the same:</p>
        <ul className="list-disc space-y-1 pl-5">
          {words.remains.map((one) => (
            <li key={one}>{one}</li>
          ))}
        </ul>
      </div>
    </Fold>
  )
}
