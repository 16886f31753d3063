import { Migration } from '@mikro-orm/migrations'

/** One row per overlay and moment: every array and text has a place for each of the nodes, in the order of numbers. */
const SNAPSHOT = `
  overlay_id uuid not null,
  at timestamptz not null,
  nodes int4multirange not null,
  "values" real[] not null,
  weighted_degrees real[] not null,
  degrees integer[] not null,
  sides text not null,
  states text not null,
  links jsonb not null,
  reading jsonb not null,
  primary key (overlay_id, at)`

export class NodeSnapshots20261208 extends Migration {
  override up(): void {
    const uncounted = [
      'nodes',
      'values',
      'weighted_degrees',
      'degrees',
      'sides',
      'states',
      'links',
      'reading',
    ]
      .map((column) => `alter column "${column}" set statistics 0`)
      .join(', ')
    this.addSql(`
      create table node_snapshots (${SNAPSHOT}) partition by range (at);
      create table node_snapshots_default partition of node_snapshots default;
      create table node_snapshot_hours (${SNAPSHOT}) partition by range (at);
      create table node_snapshot_hours_default partition of node_snapshot_hours default;
      -- Nothing is looked up by them, and counting what is in arrays is slow.
      alter table node_snapshots ${uncounted};
      alter table node_snapshot_hours ${uncounted};
      -- Who a number in snapshots is: an agent may be gone, and its name another's, when its time is looked at.
      create table snapshot_nodes (
        overlay_id uuid not null references overlays on delete cascade,
        number integer not null,
        agent_id uuid not null,
        name text not null,
        labels jsonb not null,
        current boolean not null default true,
        until timestamptz,
        primary key (overlay_id, number)
      );
      create unique index snapshot_nodes_current on snapshot_nodes (overlay_id, agent_id) where current;
      create index snapshot_nodes_until on snapshot_nodes (until) where not current;
    `)
  }

  override down(): void {
    this.addSql('drop table snapshot_nodes, node_snapshot_hours, node_snapshots;')
  }
}
