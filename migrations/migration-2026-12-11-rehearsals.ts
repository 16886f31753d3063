import { Migration } from '@mikro-orm/migrations'

export class Rehearsals20261211 extends Migration {
  override up(): void {
    this.addSql(`
      create table rehearsals (
        id uuid primary key default gen_random_uuid(),
        overlay_id uuid not null references overlays on delete cascade,
        team_id uuid not null references teams on delete cascade,
        state text not null check (state in ('waiting', 'running', 'done', 'cancelled', 'failed')),
        progress double precision not null default 0,
        expected_at timestamptz,
        asked_by_id uuid references users on delete set null,
        asked_at timestamptz not null,
        starts_at timestamptz,
        started_at timestamptz,
        ended_at timestamptz,
        note text,
        incident_id uuid references incidents on delete set null,
        exclude jsonb not null,
        taken integer,
        remain integer,
        result jsonb,
        verdict text,
        plan jsonb
      );
      create index rehearsals_overlay on rehearsals (overlay_id, asked_at desc);
      -- Looked for in every round of every overlay's leader.
      create index rehearsals_open on rehearsals (overlay_id) where state in ('waiting', 'running');
      create index rehearsals_team on rehearsals (team_id);
      create index rehearsals_asker on rehearsals (asked_by_id);
      create index rehearsals_incident on rehearsals (incident_id);
    `)
  }

  override down(): void {
    this.addSql('drop table rehearsals;')
  }
}
