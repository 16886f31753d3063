export { laneKeys } from './lanes'
export { layoutStretch } from './layout'
export type * from './types'
export { findNodes, type Step, stepOf, walkFrom, ZOOMS, zoomBy } from './walk'
