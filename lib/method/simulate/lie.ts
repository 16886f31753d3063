import type { Frame } from '../frame'
import type { WalkNode } from '../node'
import type { Orders } from '../orders'
import type { Report } from '../report'

/** How an agent departs from the truth; what is left out is honest. */
export interface Lie {
  /** Factors on z̄ in what it tells its neighbours, and in its reports with all that follows from it. */
  meanToNeighbours?: number
  meanToCollector?: number
  /** It really multiplies its walkers at this factor on the rates of the orders. */
  birthFactor?: number
  frame?: (frame: Frame, peer: string) => Frame
  report?: (report: Report) => Report
  /** Shows its neighbours no receipts. */
  withholdsReceipts?: boolean
}

/** Orders as a liar follows them. */
export function bentOrders(orders: Orders, lie: Lie | null): Orders {
  const factor = lie?.birthFactor
  if (factor === undefined) return orders
  const colonies = orders.colonies.map((colony) => ({
    ...colony,
    birthRateX: colony.birthRateX * factor,
    birthRateY: colony.birthRateY * factor,
  }))
  return { ...orders, colonies }
}

/** A frame as it leaves a liar. Bent orders would not pass: honest ones are signed. */
export function bentFrame(frame: Frame, peer: string, lie: Lie | null): Frame {
  if (!lie) return frame
  const factor = lie.meanToNeighbours ?? 1
  const bent: Frame = {
    ...frame,
    orders: lie.birthFactor === undefined ? frame.orders : null,
    statement: lie.withholdsReceipts ? null : frame.statement,
    colonies: frame.colonies.map((part) => ({ ...part, meanOccupancy: part.meanOccupancy * factor })),
  }
  return lie.frame ? lie.frame(bent, peer) : bent
}

/** A report as a liar makes it: a bent z̄ is bent in energies, moments and sides alike, so that it looks right. */
export function bentReport(node: WalkNode, lie: Lie | null, make: () => Report): Report {
  if (!lie) return make()
  const factor = lie.meanToCollector ?? 1
  const colonies = [...node.walking()]
  const true_ = colonies.map(({ mean }) => mean)
  for (const colony of colonies) colony.mean *= factor
  const report = make()
  colonies.forEach((colony, index) => {
    colony.mean = true_[index]!
  })
  return lie.report ? lie.report(report) : report
}
