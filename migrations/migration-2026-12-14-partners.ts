import { Migration } from '@mikro-orm/migrations'

const OWNED = ['agents', 'joining_codes', 'upgrade_offers'] as const

export class Partners20261214 extends Migration {
  override up(): void {
    this.addSql(`
      alter table overlays
        -- What the names of other teams' nodes are hidden with.
        add column sight_secret text not null
          default replace(gen_random_uuid()::text || gen_random_uuid()::text, '-', ''),
        -- Keys of labels that partners may see of the owning team's nodes.
        add column shared_labels text[] not null default '{}';
      -- Teams that share an overlay with the team that owns it: an invitation first, then a partner.
      create table overlay_partners (
        id uuid primary key default gen_random_uuid(),
        overlay_id uuid not null references overlays on delete cascade,
        team_id uuid references teams on delete cascade,
        state text not null default 'invited' check (state in ('invited', 'accepted', 'ended')),
        hash text not null unique,
        hint text not null,
        expires_at timestamptz not null,
        invited_at timestamptz not null,
        invited_by_id uuid references users on delete set null,
        accepted_at timestamptz,
        accepted_by_id uuid references users on delete set null,
        ended_at timestamptz,
        ended_by_id uuid references users on delete set null,
        contact text,
        shared_labels text[] not null default '{}',
        check (state <> 'accepted' or team_id is not null)
      );
      create unique index overlay_partners_team on overlay_partners (overlay_id, team_id) where state = 'accepted';
      create index overlay_partners_of on overlay_partners (team_id) where state = 'accepted';

      -- Null: of every team.
      alter table overlay_events add column team_id uuid references teams on delete cascade;
      create function team_of_overlay() returns trigger language plpgsql as $$
        begin
          new.team_id := coalesce(new.team_id, (select team_id from overlays where id = new.overlay_id));
          return new;
        end $$;
    `)
    // What names no team is of the team that owns the overlay.
    for (const table of OWNED)
      this.addSql(`
        alter table ${table} add column team_id uuid references teams on delete cascade;
        update ${table} t set team_id = o.team_id from overlays o where o.id = t.overlay_id;
        alter table ${table} add constraint ${table}_of_a_team check (team_id is not null);
        create index ${table}_team on ${table} (team_id);
        create trigger ${table}_team before insert on ${table} for each row execute function team_of_overlay();
      `)
    this.addSql(`
      -- Whose an agent is, and what other teams call it, for as long as anything tells of it: its row may be gone by then.
      create table agent_faces (
        agent_id uuid primary key,
        overlay_id uuid not null references overlays on delete cascade,
        team_id uuid not null references teams on delete cascade,
        number bigint generated always as identity,
        name text not null
      );
      create index agent_faces_overlay on agent_faces (overlay_id, team_id);
      insert into agent_faces (agent_id, overlay_id, team_id, name)
        select id, overlay_id, team_id, name from agents order by joined_at, id;
      insert into agent_faces (agent_id, overlay_id, team_id, name)
        select distinct on (n.agent_id) n.agent_id, n.overlay_id, o.team_id, n.name
        from snapshot_nodes n join overlays o on o.id = n.overlay_id order by n.agent_id, n.number desc
        on conflict do nothing;
      create function keep_face() returns trigger language plpgsql as $$
        begin
          insert into agent_faces (agent_id, overlay_id, team_id, name)
            values (new.id, new.overlay_id, new.team_id, new.name);
          return null;
        end $$;
      create trigger agents_face after insert on agents for each row execute function keep_face();
    `)
  }

  override down(): void {
    this.addSql('drop trigger agents_face on agents; drop function keep_face; drop table agent_faces;')
    for (const table of OWNED)
      this.addSql(`drop trigger ${table}_team on ${table}; alter table ${table} drop column team_id;`)
    this.addSql(`
      drop function team_of_overlay;
      alter table overlay_events drop column team_id;
      drop table overlay_partners;
      alter table overlays drop column sight_secret, drop column shared_labels;
    `)
  }
}
