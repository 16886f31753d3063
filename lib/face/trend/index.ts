export * from './data'
export * from './events'
export * from './summary'
