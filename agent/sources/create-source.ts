import type { Clock } from '../clock'
import type { Post } from '../collector/post'
import { ListSource } from './list-source'
import { type PathStep, parsePath } from './path-expression'
import { PolledSource } from './polled-source'
import type { SpawnProgram } from './program'
import { commandReader } from './read-command'
import { fileReader, QUIET_MS, watchFile } from './read-file'
import { httpReader } from './read-http'
import { type ResolveSrv, srvReader } from './read-srv'
import type { ReadList, Source, SourceInit } from './source'
import { DEFAULT_EVERY_SECONDS, type SourceConfig } from './source-config'

export interface SourceComponents {
  clock: Clock
  post: Post
  runProgram: SpawnProgram
  resolveSrv: ResolveSrv
}

/** One look at what a source says. */
export function readerOf(components: SourceComponents, config: SourceConfig): ReadList {
  const steps = 'at' in config && config.at !== undefined ? stepsOf(config.at) : null
  switch (config.kind) {
    case 'list':
      return async () => ({ ok: true, items: config.items.map((node) => ({ node, quality: null })) })
    case 'file':
      return fileReader({ path: config.path, steps })
    case 'command':
      return commandReader(components, { command: config.command, steps })
    case 'srv':
      return srvReader(components, config)
    case 'http':
      return httpReader(components, { url: config.url, steps })
  }
}

export function createSource(components: SourceComponents, config: SourceConfig, init: SourceInit): Source {
  if (config.kind === 'list') return new ListSource(config.items, init)
  const { clock } = components
  const everyMs = (config.everySeconds ?? DEFAULT_EVERY_SECONDS) * 1000
  const read = readerOf(components, config)
  const isFile = config.kind === 'file'
  return new PolledSource(
    { clock, read },
    {
      ...init,
      kind: config.kind,
      everyMs,
      ...(isFile
        ? {
            secondLookMs: 2 * QUIET_MS,
            watch: (changed) => watchFile({ clock }, config.path, changed),
          }
        : {}),
    },
  )
}

function stepsOf(at: string): readonly PathStep[] {
  const path = parsePath(at)
  if (!path.ok) throw new TypeError(path.issue)
  return path.steps
}
