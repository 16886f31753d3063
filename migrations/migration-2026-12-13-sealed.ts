import { Migration } from '@mikro-orm/migrations'

export class Sealed20261213 extends Migration {
  override up(): void {
    this.addSql(`
      -- Masked sums of rounds that are not closed yet: nothing in one of them means anything without all the others.
      create table masked_vectors (
        overlay_id uuid not null references overlays on delete cascade,
        round bigint not null,
        agent_id uuid not null references agents on delete cascade,
        sums text not null,
        primary key (overlay_id, round, agent_id)
      );
      -- What was stored of sealed and flagged overlays before their sums were masked.
      update agent_states s set sums = json_build_object('attached', (s.sums->>'attached')::int, 'colonies', '[]'::json,
          'energies', '[]'::json, 'moments', '[]'::json, 'linkEnds', 0, 'linkEndWeight', 0, 'sweep', null)
        from overlays o where o.id = s.overlay_id and o.disclosure <> 'named';
    `)
  }

  override down(): void {
    this.addSql('drop table masked_vectors;')
  }
}
