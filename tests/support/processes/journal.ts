import pg from 'pg'
import { until } from '../until'
import type { Awake } from './awake'

export interface Entry {
  atMs: number
  kind: 'claim' | 'orders' | 'reading'
  /** Of the overlay when it was written. */
  holder: string
  sequence: number
}

const TABLES = `
  create table journal (
    id bigint generated always as identity,
    at timestamptz not null default clock_timestamp(),
    kind text not null, holder text not null, sequence bigint not null);
  create function enter_control() returns trigger language plpgsql as $$ begin
    insert into journal (kind, holder, sequence)
    values (case when new.sequence = coalesce(old.sequence, 0) then 'claim' else 'orders' end, new.holder, new.sequence);
    return new; end $$;
  create function enter_reading() returns trigger language plpgsql as $$ begin
    insert into journal (kind, holder, sequence)
    select 'reading', holder, sequence from controls
    where overlay_id = new.overlay_id and new.lambda2 is not null;
    return new; end $$;
  create trigger journal after insert or update on controls for each row execute function enter_control();
  create trigger journal after insert on readings for each row execute function enter_reading();`

/** All that leaders write, in the order in which it was written, as the database itself saw it. */
export class Journal {
  readonly #client: pg.Client

  constructor(databaseUrl: string) {
    this.#client = new pg.Client({ connectionString: databaseUrl })
  }

  async start(): Promise<void> {
    await this.#client.connect()
    await this.#client.query(TABLES)
  }

  async stop(): Promise<void> {
    await this.#client.end()
  }

  async entries(): Promise<Entry[]> {
    const { rows } = await this.#client.query<Entry>(
      `select (extract(epoch from at) * 1000)::float8 as "atMs", kind, holder, sequence::int as sequence
       from journal order by id`,
    )
    return rows
  }

  /** Runs `act` while a leader is in the middle of a round: what it has written is locked and not yet there. */
  async midRound(act: () => void): Promise<void> {
    await this.#client.query('begin; lock table readings in share mode')
    const isARoundWaiting = async () => {
      const { rows } = await this.#client.query<{ waiting: number }>(
        `select count(*)::int as waiting from pg_locks where not granted and relation = 'readings'::regclass`,
      )
      return (rows[0]?.waiting ?? 0) > 0
    }
    await until(isARoundWaiting)
    act()
    await this.#client.query('rollback')
  }
}

/** Milliseconds between entries of one kind that follow each other, of those that programs could run in. */
export function gapsMs(entries: readonly Entry[], kind: Entry['kind'], awake: Awake): number[] {
  const times = entries.filter((entry) => entry.kind === kind).map(({ atMs }) => atMs)
  return times.slice(1).map((atMs, index) => awake.msBetween(times[index] ?? atMs, atMs))
}

/** Every number is the one after the number before, whoever wrote it. */
export function isUnbroken(entries: readonly Entry[]): boolean {
  const numbers = entries.filter(({ kind }) => kind === 'orders').map(({ sequence }) => sequence)
  return numbers.every((number, index) => index === 0 || number === (numbers[index - 1] ?? 0) + 1)
}

/** Those who wrote, one for each time that they were the only one to. */
export function termsIn(entries: readonly Entry[]): string[] {
  return entries.map(({ holder }) => holder).filter((holder, index, all) => holder !== all[index - 1])
}
