import { execFileSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'

export interface PrivateCa {
  ca: string
  cert: string
  key: string
}

/** A certification authority of one test, and a certificate of it for addresses. PEM texts. Needs the openssl command. */
export function privateCa(addresses: readonly string[]): PrivateCa {
  const folder = mkdtempSync(join(tmpdir(), 'thinspan-ca-'))
  const at = (name: string) => join(folder, name)
  const run = (...given: string[]) => execFileSync('openssl', given, { cwd: folder, stdio: 'pipe' })
  const newKey = ['-newkey', 'ec', '-pkeyopt', 'ec_paramgen_curve:P-256', '-nodes']
  try {
    writeFileSync(
      at('names.cnf'),
      `subjectAltName=${addresses.map((address) => `IP:${address}`).join(',')}\n`,
    )
    run(
      'req',
      '-x509',
      ...newKey,
      '-keyout',
      'ca.key',
      '-out',
      'ca.pem',
      '-days',
      '2',
      '-subj',
      '/CN=Harbourline test CA',
    )
    run('req', ...newKey, '-keyout', 'end.key', '-out', 'end.csr', '-subj', '/CN=tar-01.harbourline.example')
    const issuer = ['-CA', 'ca.pem', '-CAkey', 'ca.key', '-CAcreateserial']
    run('x509', '-req', '-in', 'end.csr', ...issuer, '-out', 'end.pem', '-days', '2', '-extfile', 'names.cnf')
    const read = (name: string) => readFileSync(at(name), 'utf8')
    return { ca: read('ca.pem'), cert: read('end.pem'), key: read('end.key') }
  } finally {
    rmSync(folder, { recursive: true })
  }
}
