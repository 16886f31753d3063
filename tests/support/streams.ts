export interface StreamMessage {
  event: string
  data: unknown
}

/** Messages of a response of server-sent events, one after the other; null at its end. */
export function readStream(response: Response): { next(): Promise<StreamMessage | null> } {
  if (!response.body) throw new Error('There is no stream.')
  const reader = response.body.pipeThrough(new TextDecoderStream()).getReader()
  let text = ''
  return {
    next: async () => {
      for (;;) {
        const end = text.indexOf('\n\n')
        if (end >= 0) {
          const block = text.slice(0, end)
          text = text.slice(end + 2)
          const message = parse(block)
          if (message) return message
          continue
        }
        const { value, done } = await reader.read()
        if (done) return null
        text += value
      }
    },
  }
}

/** Null for comments and settings. */
function parse(block: string): StreamMessage | null {
  const field = (name: string): string | undefined =>
    block
      .split('\n')
      .find((line) => line.startsWith(`${name}: `))
      ?.slice(name.length + 2)
  const data = field('data')
  return data === undefined ? null : { event: field('event') ?? 'message', data: JSON.parse(data) }
}
