import { type Clock, sleep } from '@/agent'
import type { Story } from './story'

export interface TellComponents {
  clock: Clock
  /** Carries out one command. What it answers is for the log; it does not throw. */
  obey: (command: string) => Promise<object>
  /** Told of every command carried out, with its time since the first loop began. */
  onStep: (atSeconds: number, command: string, answer: object) => void
}

/** Tells a story over and over until the signal aborts. A command that takes long delays the next, not the next loop. */
export async function tellStory(
  { clock, obey, onStep }: TellComponents,
  story: Story,
  signal: AbortSignal,
): Promise<void> {
  const startedAtMs = clock.monotonicMs()
  const elapsedMs = (): number => clock.monotonicMs() - startedAtMs
  for (let beginsSeconds = 0; ; beginsSeconds += story.loopSeconds) {
    for (const { atSeconds, command } of story.steps) {
      const dueMs = (beginsSeconds + atSeconds) * 1000
      if (!(await sleep(clock, Math.max(0, dueMs - elapsedMs()), signal))) return
      const answer = await obey(command)
      onStep(Math.round(elapsedMs() / 100) / 10, command, answer)
    }
  }
}
