import { Migration } from '@mikro-orm/migrations'

/** New links that operators mean to make, each with what was foretold and what came. */
export class Reinforcement20261212 extends Migration {
  override up(): void {
    this.addSql(`
      create table reinforcements (
        id uuid primary key default gen_random_uuid(),
        overlay_id uuid not null references overlays on delete cascade,
        a text not null,
        b text not null,
        method text not null check (method in ('exact', 'first-order')),
        weight double precision not null,
        lambda2_then double precision not null,
        forecast double precision not null,
        degree_a integer,
        degree_b integer,
        planned_by_id uuid references users on delete set null,
        planned_at timestamptz not null,
        before_at timestamptz,
        before_lambda2 double precision,
        joined_at timestamptz,
        seen_by text check (seen_by in ('named', 'degrees', 'operator')),
        after_at timestamptz,
        after_lambda2 double precision,
        withdrawn_at timestamptz,
        check (a <> b)
      );
      create index reinforcements_overlay on reinforcements (overlay_id, planned_at);
      create index reinforcements_planner on reinforcements (planned_by_id);
      -- One plan for a pair at a time.
      create unique index reinforcements_pair on reinforcements (overlay_id, a, b)
        where joined_at is null and withdrawn_at is null;
    `)
  }

  override down(): void {
    this.addSql('drop table reinforcements;')
  }
}
