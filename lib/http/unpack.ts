import { promisify } from 'node:util'
import { gunzip } from 'node:zlib'
import { AppError } from './app-error'

/** What bodies may be packed with; answers say so as `Accept-Encoding` (RFC 7694), and agents pack from then on. */
export const BODY_ENCODING = 'gzip'

const unzip = promisify(gunzip)

/**
 * A body without its content coding (RFC 9110, section 8.4), where one is named. Unpacking ends at the limit, so that a
 * few bytes cannot become many. @throws AppError
 */
export async function unpacked(
  bytes: Uint8Array,
  encoding: string | null,
  maxBytes: number,
): Promise<Uint8Array> {
  switch (encoding?.trim().toLowerCase() ?? '') {
    case '':
    case 'identity':
      return bytes
    case BODY_ENCODING:
      return unzip(bytes, { maxOutputLength: maxBytes }).catch((error: unknown) => {
        throw isOverLimit(error)
          ? new AppError('too-large', `Send at most ${maxBytes} bytes, counted before they are packed.`)
          : new AppError(
              'malformed-gzip',
              'The body could not be unpacked. Send all of it, or send it unpacked.',
            )
      })
    default:
      throw new AppError(
        'wrong-encoding',
        `Send the body as it is, or packed with "content-encoding: ${BODY_ENCODING}".`,
      )
  }
}

const isOverLimit = (error: unknown): boolean =>
  error instanceof RangeError && 'code' in error && error.code === 'ERR_BUFFER_TOO_LARGE'
