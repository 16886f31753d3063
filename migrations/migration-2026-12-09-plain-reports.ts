import { Migration } from '@mikro-orm/migrations'

/**
 * Reports are written hundreds of times for each time that anything asks the database about what is in them, so they are kept
 * as the text they are. By `npm run bench -- ingest`, taking them apart into jsonb was 27 % of the database's work and
 * compressing the pieces 9 %; as jsonb and not compressed a row has 4.8 kB instead of 3.0.
 */
export class PlainReports20261209 extends Migration {
  override up(): void {
    this.addSql(`
      alter table agent_states
        alter column sums type json using sums::text::json,
        alter column node type json using node::text::json;
      -- Compressed only as far as the next row of the agent needs to fit on the page beside the present one.
      alter table agent_states set (toast_tuple_target = 4080);
    `)
  }

  override down(): void {
    this.addSql(`
      alter table agent_states reset (toast_tuple_target);
      alter table agent_states alter column sums type jsonb, alter column node type jsonb;
    `)
  }
}
