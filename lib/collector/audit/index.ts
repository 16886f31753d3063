export {
  type AuditInput,
  type AuditMemory,
  type AuditVerdict,
  auditAgents,
  BLANK_AUDIT,
} from './audit-agents'
