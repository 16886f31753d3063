export {
  type ExplainingLabel,
  type Explanation,
  explainSides,
  type LabelLeftOut,
  LEFT_OUT_REASONS,
  type SidedNode,
} from './explain'
