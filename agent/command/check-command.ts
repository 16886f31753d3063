import { readConfig } from '../config'
import { EXIT, type ExitCode } from '../exit-codes'
import { createWsTransport } from '../transport/ws'
import { listenFindings, neighbourFindings, sourceFinding } from './check-links'
import { configFindings, keyFindings, machineFindings, passFinding, spoolFinding } from './check-machine'
import { collectorFindings } from './check-network'
import { type CommandComponents, reasonOf } from './components'
import { bad, type Finding, findingLine } from './finding'
import type { Options } from './options'
import { tlsOf } from './session'
import { settingsOf } from './settings'

/** Says what would go wrong, a line each, before anything is started. Changes nothing. */
export async function checkCommand(
  components: CommandComponents,
  options: Options,
  signal: AbortSignal,
): Promise<ExitCode> {
  const findings: Finding[] = []
  const tell = (...found: Finding[]) => {
    findings.push(...found)
    if (!options.json) for (const finding of found) components.say(findingLine(finding))
  }
  tell(...machineFindings(components))
  const read = await readConfig(options.config)
  tell(...(await configFindings(options.config, read)))
  if (read.ok) {
    const { config } = read
    const settings = settingsOf(config, options)
    tell(...keyFindings(config))
    const tls = await tlsOr(settings, tell)
    const transport = createWsTransport({ clock: components.clock }, { tls })
    const post = components.createPost({ ca: tls?.ca })
    const contact = await collectorFindings(components, { config, post }, signal)
    tell(...contact.findings)
    tell(passFinding(config, contact.nowMs))
    tell(...(await listenFindings(components, { settings, transport }, signal)))
    const source = await sourceFinding(
      components,
      { settings, config, post, directory: contact.directory },
      signal,
    )
    if (source.finding) tell(source.finding)
    const addresses = [...new Set([...settings.neighbours, ...source.addresses])]
    tell(...(await neighbourFindings(components, { addresses, transport }, signal)))
    const spool = await spoolFinding(settings)
    if (spool) tell(spool)
  } else if (options.collector !== null) {
    const post = components.createPost({ ca: (await tlsOr(options, tell))?.ca })
    const contact = await collectorFindings(
      components,
      { config: null, post, collector: options.collector },
      signal,
    )
    tell(...contact.findings)
  }
  const wrong = findings.filter((finding) => !finding.ok).length
  if (options.json) components.say(JSON.stringify({ ok: wrong === 0, findings }))
  else components.say(wrong === 0 ? 'Nothing is wrong.' : `${wrong} of ${findings.length} would go wrong.`)
  return wrong === 0 ? EXIT.ok : EXIT.checkFailed
}

function tlsOr(settings: Parameters<typeof tlsOf>[0], tell: (finding: Finding) => void) {
  return tlsOf(settings).catch((error: unknown) => {
    tell(bad('Certificates', `${reasonOf(error)}.`, 'Give the path of a PEM file that the agent may read.'))
    return undefined
  })
}
