import { Migration } from '@mikro-orm/migrations'

export class AgentsInService20261206 extends Migration {
  override up(): void {
    this.addSql(`
      alter table agents drop constraint agents_state_check;
      alter table agents add constraint agents_state_check
        check (state in ('joined', 'left', 'revoked', 'left-out'));
      alter table agents
        add column node text,
        add column host text,
        add column left_out_because text,
        add column key_changed_at timestamptz,
        add column pass_ends_at timestamptz;
      -- Passes given out so far lasted a day.
      update agents set pass_ends_at = now() + interval '24 hours';
      -- Whoever left gives the name free; its row stays until another takes the name.
      alter table agents drop constraint agents_overlay_id_name_key;
      create unique index agents_name on agents (overlay_id, name) where state <> 'left';
      create index agents_ended on agents (overlay_id, pass_ends_at) where state <> 'joined';
      -- Links to agents whose row is gone are still shut while their last pass lasts.
      create table shut_agents (
        agent_id uuid primary key,
        overlay_id uuid not null references overlays on delete cascade,
        until timestamptz not null
      );
      create index shut_agents_overlay on shut_agents (overlay_id, until);

      -- Of all incarnations before, not only the last: several programs with one key take turns.
      alter table agent_states
        add column former_incarnations jsonb not null default '[]',
        add column previous_report_number bigint,
        add column late_reports integer not null default 0,
        add column relayed boolean not null default false,
        add column complaints jsonb not null default '[]';
      update agent_states set former_incarnations = jsonb_build_array(previous_incarnation)
        where previous_incarnation is not null;
      alter table agent_states drop column previous_incarnation;

      alter table controls
        add column orders_text text,
        add column orders_key text,
        add column orders_signature text;
      update controls set orders_text = orders::text;
      alter table controls drop column orders;

      alter table overlays
        add column retire_after_hours integer check (retire_after_hours > 0),
        add column key_since timestamptz;
      -- The key in force is the overlay's own; here are the one to come and the ones before.
      create table overlay_keys (
        overlay_id uuid not null references overlays on delete cascade,
        public_key text not null,
        state text not null check (state in ('next', 'previous')),
        private_key text,
        -- Takes over at the latest, or is good until.
        until timestamptz not null,
        -- Of the ring that announced it.
        ring_version integer not null,
        primary key (overlay_id, public_key)
      );
      create unique index overlay_keys_next on overlay_keys (overlay_id) where state = 'next';
      -- Every ring after the first, so that an agent that slept long can follow from one to the next.
      create table overlay_key_rings (
        overlay_id uuid not null references overlays on delete cascade,
        version integer not null check (version > 1),
        keys jsonb not null,
        signed_by text not null,
        signature text not null,
        made_at timestamptz not null,
        primary key (overlay_id, version)
      );

      create table agent_releases (
        version text primary key,
        sha256 text not null,
        bytes bytea not null,
        added_at timestamptz not null
      );
      create table upgrade_offers (
        id uuid primary key default gen_random_uuid(),
        overlay_id uuid not null references overlays on delete cascade,
        version text not null references agent_releases,
        label_key text,
        label_value text,
        offered_at timestamptz not null,
        offered_by_id uuid references users on delete set null,
        halted_at timestamptz,
        check ((label_key is null) = (label_value is null))
      );
      create index upgrade_offers_overlay on upgrade_offers (overlay_id, offered_at desc);
      create index upgrade_offers_person on upgrade_offers (offered_by_id);
    `)
  }

  override down(): void {
    this.addSql(`
      drop table upgrade_offers, agent_releases, overlay_key_rings, overlay_keys, shut_agents;
      alter table overlays drop column retire_after_hours, drop column key_since;
      alter table controls add column orders jsonb;
      update controls set orders = orders_text::jsonb;
      alter table controls drop column orders_text, drop column orders_key, drop column orders_signature;
      alter table agent_states add column previous_incarnation text;
      update agent_states set previous_incarnation = former_incarnations->>0;
      alter table agent_states drop column former_incarnations, drop column previous_report_number,
        drop column late_reports, drop column relayed, drop column complaints;
      drop index agents_name, agents_ended;
      delete from agents a using agents b
        where a.state = 'left' and a.overlay_id = b.overlay_id and a.name = b.name and a.id <> b.id;
      update agents set state = 'revoked' where state = 'left-out';
      alter table agents add constraint agents_overlay_id_name_key unique (overlay_id, name);
      alter table agents drop constraint agents_state_check;
      alter table agents add constraint agents_state_check check (state in ('joined', 'left', 'revoked'));
      alter table agents drop column node, drop column host, drop column left_out_because,
        drop column key_changed_at, drop column pass_ends_at;
    `)
  }
}
