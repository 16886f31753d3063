import { AppError } from './app-error'
import { unpacked } from './unpack'

export const BODY_MAX_BYTES = 64 * 1024

/** Reads a JSON body, giving up as soon as it is over the limit, packed or not and whatever Content-Length claims. */
export async function readJson(request: Request, maxBytes = BODY_MAX_BYTES): Promise<unknown> {
  const type = request.headers.get('content-type')?.split(';')[0]?.trim().toLowerCase()
  if (type !== 'application/json')
    throw new AppError('wrong-media-type', 'Send the body as JSON with "content-type: application/json".')
  const bytes = await readBytes(request, maxBytes)
  const plain = await unpacked(bytes, request.headers.get('content-encoding'), maxBytes)
  try {
    return JSON.parse(new TextDecoder().decode(plain))
  } catch {
    throw new AppError(
      'malformed-json',
      'The body could not be read as JSON. Check quotes, commas and brackets.',
    )
  }
}

async function readBytes(request: Request, maxBytes: number): Promise<Uint8Array> {
  const tooLarge = () => new AppError('too-large', `Send at most ${maxBytes} bytes.`)
  if (Number(request.headers.get('content-length') ?? 0) > maxBytes) throw tooLarge()
  const chunks: Uint8Array[] = []
  let bytes = 0
  const reader = request.body?.getReader()
  for (let read = await reader?.read(); read && !read.done; read = await reader?.read()) {
    bytes += read.value.byteLength
    if (bytes > maxBytes) {
      await reader?.cancel()
      throw tooLarge()
    }
    chunks.push(read.value)
  }
  return Buffer.concat(chunks)
}
