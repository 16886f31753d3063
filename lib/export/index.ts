export { type ExportedNode, graphMl } from './graphml'
export { linksCsv, nodesCsv } from './tables'
export { escapeXml } from './xml'
