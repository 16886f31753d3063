import { Migration } from '@mikro-orm/migrations'

/** Of a minute or an hour: what is kept of its readings. */
const ROLLED = `
  overlay_id uuid not null,
  at timestamptz not null,
  readings integer not null,
  valued integer not null,
  fresh integer not null,
  least double precision,
  most double precision,
  mean double precision,
  fresh_median double precision,
  low double precision,
  high double precision,
  level text check (level in ('firm', 'weak', 'split')),
  data text not null check (data in ('fresh', 'settling', 'unheard')),
  heard integer,
  joined integer,
  crossing_links integer,
  demo boolean not null,
  primary key (overlay_id, at)`

/** Readings by day in place of by month, so that days can be dropped; and what is kept for longer. */
export class ReadingsForYears20261207 extends Migration {
  override up(): void {
    this.addSql(`
      alter table readings rename to readings_by_month;
      alter table readings_default rename to readings_by_month_default;
      alter index readings_pkey rename to readings_by_month_pkey;
      alter index readings_default_pkey rename to readings_by_month_default_pkey;
      create table readings (
        like readings_by_month including defaults including constraints,
        primary key (overlay_id, at)
      ) partition by range (at);
      create table readings_default partition of readings default;
    `)
    this.addSql(`
      do $$
      declare first timestamptz;
      begin
        for first in select distinct date_trunc('day', at, 'UTC') from readings_by_month loop
          execute format('create table %I partition of readings for values from (%L) to (%L)',
            'readings_' || to_char(first at time zone 'UTC', 'YYYY_MM_DD'), first, first + interval '24 hours');
        end loop;
      end $$;
      insert into readings select * from readings_by_month;
      drop table readings_by_month;
    `)
    this.addSql(`
      create table reading_minutes (${ROLLED}) partition by range (at);
      create table reading_minutes_default partition of reading_minutes default;
      create table reading_hours (${ROLLED}) partition by range (at);
      create table reading_hours_default partition of reading_hours default;
      -- Up to when everything has been taken over, exclusive.
      create table roll_ups (into_what text primary key, through timestamptz not null);
    `)
  }

  /** What is kept by the day is kept by the month again; minutes and hours are lost. */
  override down(): void {
    this.addSql(`
      drop table roll_ups, reading_hours, reading_minutes;
      alter table readings rename to readings_by_day;
      alter table readings_default rename to readings_by_day_default;
      alter index readings_pkey rename to readings_by_day_pkey;
      alter index readings_default_pkey rename to readings_by_day_default_pkey;
      create table readings (
        like readings_by_day including defaults including constraints,
        primary key (overlay_id, at)
      ) partition by range (at);
      create table readings_default partition of readings default;
      insert into readings select * from readings_by_day;
      drop table readings_by_day;
    `)
  }
}
