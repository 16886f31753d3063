export { previousOf } from './replace-file'
export { Upgrader, type UpgraderComponents, type UpgraderInit } from './upgrader'
