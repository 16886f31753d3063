export { openApiDocument } from './document'
export { METHODS, type Method, type PathRow, type Said } from './types'
