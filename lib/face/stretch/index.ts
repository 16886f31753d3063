export { laneKeys } from './lanes'
export { layoutStretch } from './layout'
export type * from './types'
