import { Migration } from '@mikro-orm/migrations'

export class LateArrivals20261205 extends Migration {
  override up(): void {
    this.addSql(`
      -- A report of an agent's former incarnation that arrives late must not replace one of its present.
      alter table agent_states add column previous_incarnation text;
      -- Streams look for what is new by id.
      create index overlay_events_in_order on overlay_events (overlay_id, id);
    `)
  }

  override down(): void {
    this.addSql(`
      drop index overlay_events_in_order;
      alter table agent_states drop column previous_incarnation;
    `)
  }
}
