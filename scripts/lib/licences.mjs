/** What the licences of bundled packages ask to go with every copy. */
import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'

/** The packages some input files of a bundle belong to, sorted by name, each with the text of its licence. */
export function packagesOf(root, inputs) {
  const folders = new Set()
  for (const input of inputs) {
    const folder = /^.*node_modules\/(?:@[^/]+\/)?[^/]+/.exec(input)?.[0]
    if (folder) folders.add(folder)
  }
  return [...folders]
    .map((folder) => readPackage(join(root, folder)))
    .sort((a, b) => (a.name < b.name ? -1 : 1))
}

function readPackage(folder) {
  const { name, version, license } = JSON.parse(readFileSync(join(folder, 'package.json'), 'utf8'))
  const file = readdirSync(folder).find((entry) => /^licen[cs]e/i.test(entry))
  if (file === undefined) throw new Error(`${name} comes without the text of its licence.`)
  return { name, version, license, text: readFileSync(join(folder, file), 'utf8') }
}

/** A line and the copyright per package, then each licence's text once. */
export function licenceNotices(packages) {
  const bodies = new Map()
  const lines = packages.map(({ name, version, license, text }) => {
    const copyright = text.split('\n').filter(isCopyright)
    const body = text
      .split('\n')
      .filter((line) => !isCopyright(line))
      .join('\n')
      .replace(/^\s*(#+ )?(The )?MIT License( \(MIT\))?\s*/i, '')
      .trim()
    const key = body.replace(/\s+/g, ' ')
    if (!bodies.has(key)) bodies.set(key, { license, body, names: [] })
    bodies.get(key).names.push(name)
    return `${name} ${version} (${license})${copyright.map((line) => `\n  ${line.trim()}`).join('')}`
  })
  const texts = [...bodies.values()].map(
    ({ license, body, names }) => `${license}: ${names.join(', ')}\n\n${body}`,
  )
  return ['It contains:', ...lines, '', texts.join('\n\n')].join('\n').replaceAll('*/', '* /')
}

const isCopyright = (line) => /^\s*Copyright /.test(line)
