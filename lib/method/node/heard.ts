/** Numbers remembered per link, so that a repeated or overtaken frame is told from a new one. */
const REMEMBERED = 64

/** Which of the other end's frames have come, each counted once. */
export class HeardFrames {
  private readonly recent: number[] = []
  private counted = 0

  get count(): number {
    return this.counted
  }

  /** Frames so late that nobody remembers whether they came already are not counted. */
  note(number: number): void {
    const { recent } = this
    let at = recent.length
    while (at > 0 && recent[at - 1]! > number) at -= 1
    if (recent[at - 1] === number) return
    if (at === 0 && recent.length === REMEMBERED) return
    recent.splice(at, 0, number)
    if (recent.length > REMEMBERED) recent.shift()
    this.counted += 1
  }
}
