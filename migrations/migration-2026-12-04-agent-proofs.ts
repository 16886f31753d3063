import { Migration } from '@mikro-orm/migrations'

export class AgentProofs20261204 extends Migration {
  override up(): void {
    this.addSql(`
      -- A proof opens one session: a repeated nonce finds its first use as long as the proof's time is accepted.
      alter table agent_sessions add column nonce text, add column pass_expires_at timestamptz;
      create unique index agent_sessions_nonce on agent_sessions (agent_id, nonce);
      -- The wire allows any safe integer; a number too large for its column would sink the whole batch.
      alter table agent_states alter column report_number type bigint;
    `)
  }

  override down(): void {
    this.addSql(`
      drop index agent_sessions_nonce;
      alter table agent_sessions drop column nonce, drop column pass_expires_at;
      alter table agent_states alter column report_number type integer;
    `)
  }
}
