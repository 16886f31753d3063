/** Exchanges remembered; older ones are still refused, as proofs of another exchange. */
const REMEMBERED = 8_192

/** Nonces of hellos that were proven here: said again, they belong to a recording. */
export class ProvenNonces {
  private readonly seen = new Set<string>()

  has(nonce: string): boolean {
    return this.seen.has(nonce)
  }

  add(nonce: string): void {
    this.seen.add(nonce)
    if (this.seen.size <= REMEMBERED) return
    for (const oldest of this.seen) {
      this.seen.delete(oldest)
      break
    }
  }
}
