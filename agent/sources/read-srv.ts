import type { ReadList } from './source'

/** As `resolveSrv` of node:dns/promises. @throws Error where there is no answer */
export type ResolveSrv = (name: string) => Promise<{ name: string; port: number }[]>

/** Targets of an SRV record (RFC 2782), as host:port. Priority and weight choose among servers; neighbours are all of them. */
export function srvReader({ resolveSrv }: { resolveSrv: ResolveSrv }, { name }: { name: string }): ReadList {
  return async () => {
    try {
      const records = await resolveSrv(name)
      const items = records
        // A single target "." says that the service is not offered at all (RFC 2782).
        .filter((record) => record.name !== '' && record.name !== '.')
        .map((record) => ({ node: `${record.name.replace(/\.$/, '')}:${record.port}`, quality: null }))
      return { ok: true, items }
    } catch (error) {
      return { ok: false, reason: `${name}: ${error instanceof Error ? error.message : String(error)}` }
    }
  }
}
