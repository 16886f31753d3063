import type { OverlayLink, OverlayNode } from '@/lib/data/dto'
import { escapeXml } from './xml'

type AttributeType = 'string' | 'int' | 'double' | 'boolean'
type Value = string | number | boolean | null

interface Attribute<Row> {
  name: string
  type: AttributeType
  of: (row: Row) => Value
}

export type ExportedNode = Pick<
  OverlayNode,
  'name' | 'labels' | 'side' | 'value' | 'degree' | 'weightedDegree' | 'state' | 'heardAt' | 'version'
>

const NODE: Attribute<ExportedNode>[] = [
  { name: 'name', type: 'string', of: ({ name }) => name },
  { name: 'state', type: 'string', of: ({ state }) => state },
  { name: 'side', type: 'string', of: ({ side }) => side },
  { name: 'value', type: 'double', of: ({ value }) => value },
  { name: 'degree', type: 'int', of: ({ degree }) => degree },
  { name: 'weightedDegree', type: 'double', of: ({ weightedDegree }) => weightedDegree },
  { name: 'version', type: 'string', of: ({ version }) => version },
  { name: 'heardAt', type: 'string', of: ({ heardAt }) => heardAt },
]
const EDGE: Attribute<OverlayLink>[] = [
  { name: 'weight', type: 'double', of: ({ weight }) => weight },
  { name: 'share', type: 'double', of: ({ share }) => share },
  { name: 'crossing', type: 'boolean', of: ({ crossing }) => crossing },
  { name: 'state', type: 'string', of: ({ state }) => state },
  { name: 'heardAt', type: 'string', of: ({ heardAt }) => heardAt },
]

/**
 * GraphML 1.0 (graphml.graphdrawing.org): keys declared before the graph, an undirected graph, ids that are NMTOKENs, since
 * names may be anything. Labels are attributes "label.KEY". Links whose ends are not among the nodes are left out.
 */
export function graphMl(init: {
  name: string
  at: string
  nodes: readonly ExportedNode[]
  links: readonly OverlayLink[]
}): string {
  const { name, at, nodes, links } = init
  const labels = [...new Set(nodes.flatMap((node) => Object.keys(node.labels)))].sort()
  const ofNode = [
    ...NODE,
    ...labels.map(
      (key): Attribute<ExportedNode> => ({
        name: `label.${key}`,
        type: 'string',
        of: (node) => node.labels[key] ?? null,
      }),
    ),
  ]
  const ids = new Map(nodes.map((node, at) => [node.name, `n${at}`]))
  const drawn = links.flatMap((link) => {
    const [source, target] = [ids.get(link.a), ids.get(link.b)]
    return source && target ? [{ link, source, target }] : []
  })
  return [
    '<?xml version="1.0" encoding="UTF-8"?>',
    '<graphml xmlns="http://graphml.graphdrawing.org/xmlns" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"' +
      ' xsi:schemaLocation="http://graphml.graphdrawing.org/xmlns http://graphml.graphdrawing.org/xmlns/1.0/graphml.xsd">',
    `  <desc>${escapeXml(`${name} as it was at ${at}, as far as it may be seen`)}</desc>`,
    ...ofNode.map((attribute, at) => keyOf(attribute, 'node', `d${at}`)),
    ...EDGE.map((attribute, at) => keyOf(attribute, 'edge', `e${at}`)),
    '  <graph id="overlay" edgedefault="undirected">',
    ...nodes.map((node) => `    <node id="${ids.get(node.name)}">${dataOf(ofNode, node, 'd')}</node>`),
    ...drawn.map(
      ({ link, source, target }) =>
        `    <edge source="${source}" target="${target}">${dataOf(EDGE, link, 'e')}</edge>`,
    ),
    '  </graph>',
    '</graphml>',
    '',
  ].join('\n')
}

function keyOf({ name, type }: Attribute<never>, element: 'node' | 'edge', id: string): string {
  return `  <key id="${id}" for="${element}" attr.name="${escapeXml(name)}" attr.type="${type}"/>`
}

function dataOf<Row>(attributes: readonly Attribute<Row>[], row: Row, prefix: string): string {
  return attributes
    .map(({ of }, at) => {
      const value = of(row)
      return value === null ? '' : `<data key="${prefix}${at}">${escapeXml(String(value))}</data>`
    })
    .join('')
}
