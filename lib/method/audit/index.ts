export { addBirths, type BirthClaim, birthsOff, noBirths } from './births'
export { NeighbourAudit } from './neighbour-audit'
