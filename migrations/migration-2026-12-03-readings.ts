import { Migration } from '@mikro-orm/migrations'

/** Months are attached by ensurePartitions in lib/db; what no month takes lands in the default partition. */
export class Readings20261203 extends Migration {
  override up(): void {
    this.addSql(`
      create table readings (
        overlay_id uuid not null,
        at timestamptz not null,
        lambda2 double precision,
        low double precision,
        high double precision,
        cross_check double precision,
        usual double precision,
        level text check (level in ('firm', 'weak', 'split')),
        trend text check (trend in ('steady', 'falling', 'rising')),
        data text not null check (data in ('fresh', 'settling', 'unheard')),
        verdict text not null,
        detail text not null,
        body jsonb not null,
        demo boolean not null default false,
        primary key (overlay_id, at)
      ) partition by range (at);
      create table readings_default partition of readings default;
    `)
  }

  override down(): void {
    this.addSql('drop table readings;')
  }
}
