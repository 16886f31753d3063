/** The agent as one self-contained file, made anew only when what it is made from has changed. */
import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { filesUnder, hashSources, reasonToBuild } from './build.mjs'
import { licenceNotices, packagesOf } from './licences.mjs'

export const AGENT_FILE = '.agent/thinspan-agent.mjs'
const STAMP = '.agent/sources'
const SOURCE_FOLDERS = ['agent', 'lib/method', 'lib/protocol']
const SOURCE_FILES = [
  'package-lock.json',
  'package.json',
  'scripts/lib/agent-file.mjs',
  'scripts/lib/licences.mjs',
  'tsconfig.json',
]

/** Resolves to what was done, in a few words, or to null. */
export async function ensureAgentFile(root) {
  const files = [...filesUnder(root, SOURCE_FOLDERS), ...SOURCE_FILES].sort()
  const hash = hashSources(files, (file) => readFileSync(join(root, file)))
  const stampFile = join(root, STAMP)
  const reason = reasonToBuild({
    hasBuild: existsSync(join(root, AGENT_FILE)),
    stamp: existsSync(stampFile) ? readFileSync(stampFile, 'utf8') : null,
    hash,
  })
  if (reason === null) return null
  rmSync(stampFile, { force: true })
  const { version, bytes } = await buildAgentFile(root, { outFile: join(root, AGENT_FILE) })
  writeFileSync(stampFile, hash)
  return `version ${version}, ${Math.round(bytes / 1000)} kB, built, as ${reason}`
}

/** Another `version` than the package's is for tests of upgrades. */
export async function buildAgentFile(root, { outFile, version = versionOf(root) }) {
  const { build } = await import('esbuild')
  const { metafile, outputFiles } = await build({
    absWorkingDir: root,
    entryPoints: ['agent/main.ts'],
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'esm',
    minify: true,
    legalComments: 'none',
    metafile: true,
    write: false,
    define: { THINSPAN_AGENT_VERSION: JSON.stringify(version) },
    // Some packages are CommonJS and ask for Node's own modules by `require`, which a module does not have.
    banner: {
      js: "import { createRequire as thinspanRequire } from 'node:module'\nconst require = thinspanRequire(import.meta.url)",
    },
    plugins: [oneLanguage],
  })
  const shebang = '#!/usr/bin/env node\n'
  const code = outputFiles[0].text.replace(/^#!.*\n/, '')
  const notices = licenceNotices(packagesOf(root, Object.keys(metafile.inputs)))
  const text = `${shebang}/* thinspan-agent ${version}\n\n${notices}\n*/\n${code}`
  writeWhole(outFile, text)
  return { version, bytes: Buffer.byteLength(text) }
}

/** The schema library brings its messages in fifty languages, two thirds of the file; English is built in elsewhere. */
const oneLanguage = {
  name: 'one-language',
  setup({ onResolve, onLoad }) {
    onResolve({ filter: /\/locales\/index\.js$/ }, ({ path }) => ({ path, namespace: 'one-language' }))
    onLoad({ filter: /.*/, namespace: 'one-language' }, () => ({ contents: 'export {}' }))
  },
}

function versionOf(root) {
  return JSON.parse(readFileSync(join(root, 'package.json'), 'utf8')).version
}

/** A reader sees the old file or the new one. */
function writeWhole(path, text) {
  mkdirSync(dirname(path), { recursive: true })
  const draft = `${path}.${process.pid}`
  writeFileSync(draft, text, { mode: 0o755 })
  renameSync(draft, path)
}
