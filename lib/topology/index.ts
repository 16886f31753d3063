export { type EdgeListResult, type LinkAttributes, parseEdgeList, type TopologyGraph } from './edge-list'
export { type Labels, type NodeListResult, parseNodeList } from './node-list'
export { describeTopologyProblem, type TopologyProblem } from './problems'
