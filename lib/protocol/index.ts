export {
  type KeyChangeReply,
  type KeyChangeRequest,
  keyChangeReplySchema,
  keyChangeRequestSchema,
  keyChangeText,
  type LeaveReply,
  type LeaveRequest,
  leaveReplySchema,
  leaveRequestSchema,
  type UpgradeOffer,
  upgradeOfferSchema,
  upgradeText,
} from './agent-life'
export { type AgentProblem, agentProblemSchema } from './agent-problem'
export { CLOSE, type CloseName, closeName } from './close-codes'
export { type Directory, directorySchema, nodeAddressSchema } from './directory'
export {
  type EnrolReply,
  type EnrolRequest,
  enrolReplySchema,
  enrolRequestSchema,
  enrolText,
  labelsSchema,
  linkAddressSchema,
  nodeNameSchema,
  type PassGrant,
  passGrantSchema,
} from './enrol'
export { encodeFrame } from './frame-codec'
export { type DecodeInit, type DecodeResult, decodeFrame, type FrameError } from './frame-decode'
export {
  encodeProof,
  Handshake,
  type HandshakeEffect,
  type HandshakeInit,
  type LinkPeer,
  type LinkRole,
  linkStatement,
} from './handshake'
export { decodeHello, encodeHello, type Hello, helloSchema, INCARNATION, NONCE_BYTES } from './hello'
export { followsRing, type KeyRing, keyRingSchema, signKeyRing } from './key-ring'
export {
  generateKeys,
  type KeyPair,
  keysFromPem,
  pemOf,
  publicKeyFromRaw,
  RAW_KEY,
  rawPublicKey,
  signBytes,
  signText,
  verifyBytes,
  verifyText,
} from './keys'
export * from './limits'
export { generateMaskKeys, type MaskEnd, type MaskKeys, pairStream } from './mask-keys'
export { FRAME_VERSION, LINK_VERSIONS, MESSAGE_KIND } from './message-kind'
export { ProvenNonces } from './nonces'
export { ordersBytes, parseOrders } from './orders-part'
export { ordersSchema } from './orders-schema'
export {
  PASS_CLOCK_TOLERANCE_SECONDS,
  PASS_ISSUER,
  type PassClaims,
  type PassError,
  type PassResult,
  signPass,
  verifyPass,
} from './pass'
export { type Receipt, receiptSchema, signReceipt, statementOf, verifyReceipt } from './receipt'
export {
  decodeRelay,
  decodeRelayReply,
  encodeRelay,
  encodeRelayReply,
  RELAY_HOPS,
  type RelayMessage,
  relayMessageSchema,
} from './relay'
export {
  AGENT_PROTOCOL,
  type AwaySummary,
  awaySummarySchema,
  MAX_AWAY,
  type ReportReply,
  type ReportRequest,
  reportReplySchema,
  reportRequestSchema,
  reportSchema,
} from './report-schema'
export {
  SESSION_SKEW_SECONDS,
  type SessionReply,
  type SessionRequest,
  sessionReplySchema,
  sessionRequestSchema,
  sessionText,
} from './session'
export { type SignedOrdersResult, signedOrdersSchema, signOrders, verifyOrders } from './signed-orders'
export {
  RELAYED_MOST_SECONDS,
  type RelayedReply,
  relayedReplySchema,
  type SignedReport,
  signedReportSchema,
  signReport,
  verifyReport,
} from './signed-report'
