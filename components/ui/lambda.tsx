/** λ₂ or λ₃: composed, since the families have neither letter nor small figure. */
export function Lambda({ n }: { n: 2 | 3 }) {
  return (
    <span className="whitespace-nowrap">
      λ<sub>{n}</sub>
    </span>
  )
}
