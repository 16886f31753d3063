export { createSource, readerOf, type SourceComponents } from './create-source'
export { EMPTY_LOOKS } from './kept-list'
export {
  Neighbourhood,
  type NeighbourhoodComponents,
  type NeighbourhoodFacts,
  type NeighbourKeeper,
} from './neighbourhood'
export { type ProgramInit, type ProgramResult, runProgram, type SpawnProgram } from './program'
export type { ResolveSrv } from './read-srv'
export { resolveItems } from './resolve'
export { type AddressRule, hostPortOf, readRule } from './rule'
export type { NodeItem, ReadList, ReadResult, Source, SourceInit } from './source'
export { type SourceConfig, sourceConfigSchema } from './source-config'
