import type { SentAction } from './browser'

/** What the server answers when somebody else's browser sends the action. */
export async function sendAs(
  origin: string,
  cookie: string,
  action: SentAction | undefined,
): Promise<string> {
  if (!action) throw new Error('The action was not sent before.')
  const { url, headers, body } = action
  const response = await fetch(url, {
    method: 'POST',
    headers: { ...headers, cookie, origin },
    body: new Uint8Array(body),
  })
  return response.text()
}
