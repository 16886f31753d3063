/** Statements that lay rows out; each takes from when and until when. */

/**
 * λ₂ of an overlay over time: a level of its own, two tides a day, noise, every ninth day four hours in which it
 * thins out; ten minutes of every 97th hour withheld.
 */
const COURSE = `
  cross join lateral (select extract(epoch from t)::bigint as s, hashtext(o.id::text) as h) k
  cross join lateral (select
    (k.s / 3600 + k.h) % 97 = 0 and k.s % 3600 < 600 as withheld,
    (k.s / 86400 + k.h) % 9 = 0 and k.s % 86400 between 36000 and 50400 as thin) e
  cross join lateral (select (0.4 + abs(k.h % 100) / 250.0) * (1 + 0.1 * sin(k.s / 7116.0) + 0.02 * (random() - 0.5))
    * case when e.thin then 0.3 else 1 end as v) l`

const LEVEL = `case when e.thin then 'weak' else 'firm' end`
const DATA = `case when e.withheld then 'unheard' when k.s % 3600 < 30 then 'settling' else 'fresh' end`
const VERDICT = `case when e.withheld then 'No reading since 11:46 UTC: 20 of ' || %nodes% || ' agents have fallen silent.'
  when e.thin then 'Weak: three links hold Tarnwick and Gullhythe to the rest, at 31 % of what is usual.'
  else 'Firm: the overlay hangs together as it usually does.' end`
const DETAIL = `case when e.thin then 'The cut follows the label office: Tarnwick, Gullhythe on one side, Pinnet Bay, Eelholm on '
    || 'the other. Link more nodes across it before draining any of them.'
  else 'All agents are heard. The second weakest cut is at most twice as strong.' end`

const body = (
  nodes: number,
) => `jsonb_build_object('confidence', 0.9, 'core', null, 'lambda3AtMost', l.v * 2.1,
  'treatAsSplit', false, 'singleCut', true,
  'sides', jsonb_build_array(jsonb_build_object('name', 'a', 'nodes', ${Math.floor(nodes / 3)}),
    jsonb_build_object('name', 'b', 'nodes', ${nodes - Math.floor(nodes / 3)})),
  'crossingLinks', case when e.thin then 3 else 9 end, 'crossingWeight', 2.5 + random() / 10, 'looseEnds', '[]'::jsonb,
  'coverage', jsonb_build_object('linksKnown', ${nodes * 4}, 'linksMeasured', ${nodes * 4 - 3}, 'joined', ${nodes},
    'heard', case when e.withheld then ${Math.floor(nodes * 0.9)} else ${nodes} end, 'unheard', case when e.withheld then ${nodes - Math.floor(nodes * 0.9)} else 0 end,
    'withoutAgent', 0, 'leftOut', 0),
  'linkKind', 'path', 'seedings', '[811, 812, 813, 814, 815]'::jsonb, 'last', null)`

/** Every two seconds. */
export function readingRows(nodes: number): string {
  return `insert into readings (overlay_id, at, lambda2, low, high, cross_check, usual, level, trend, data, verdict, detail, body)
    select o.id, t, case when e.withheld then null else l.v end, case when e.withheld then null else l.v * 0.97 end,
      case when e.withheld then null else l.v * 1.03 end, case when e.withheld then null else l.v * 1.01 end, 0.6, ${LEVEL}, 'steady', ${DATA},
      ${VERDICT.replace('%nodes%', String(nodes))}, ${DETAIL}, ${body(nodes)}
    from overlays o cross join generate_series(?::timestamptz, ?::timestamptz - interval '1 second', interval '2 seconds') t ${COURSE}`
}

/** As the roll-up leaves them. */
export function minuteRows(table: string, every: string, nodes: number): string {
  return `insert into ${table} (overlay_id, at, readings, valued, fresh, least, most, mean, fresh_median, low, high, level, data,
      heard, joined, crossing_links, demo)
    select o.id, t, 30, 30, 30, l.v * 0.98, l.v * 1.02, l.v, l.v, l.v * 0.95, l.v * 1.05, ${LEVEL}, ${DATA}, ${nodes}, ${nodes}, 9, false
    from overlays o cross join generate_series(?::timestamptz, ?::timestamptz - interval '1 second', interval '${every}') t ${COURSE}`
}

export function snapshotRows(table: string, every: string, nodes: number): string {
  const third = Math.floor(nodes / 3)
  const reals = (expression: string) =>
    `(select array_agg((${expression})::real) from generate_series(1, ${nodes}) i where k.s is not null)`
  return `insert into ${table} (overlay_id, at, nodes, "values", weighted_degrees, degrees, sides, states, links, reading)
    select o.id, t + interval '1 second', int4multirange(int4range(1, ${nodes + 1})),
      ${reals(`case when i <= ${third} then 1.4 else -0.7 end + random() / 5`)}, ${reals('7.5 + random() / 2')},
      (select array_agg(8) from generate_series(1, ${nodes})), repeat('a', ${third}) || repeat('b', ${nodes - third}), repeat('h', ${nodes}),
      jsonb_build_array(jsonb_build_array(1, ${nodes}, 0.97, 0.3, 0), jsonb_build_array(2, ${nodes - 1}, 0.95, 0.31, 0),
        jsonb_build_array(3, ${nodes - 2}, 0.99, 0.29, 0)),
      ${body(nodes)} || jsonb_build_object('at', to_char(t at time zone 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS"Z"'), 'lambda2', l.v, 'low', l.v * 0.97,
        'high', l.v * 1.03, 'crossCheck', l.v, 'usual', 0.6, 'level', ${LEVEL}, 'trend', 'steady', 'data', 'fresh',
        'verdict', ${VERDICT.replace('%nodes%', String(nodes))}, 'detail', ${DETAIL}, 'demo', false)
    from overlays o cross join generate_series(?::timestamptz, ?::timestamptz - interval '2 seconds', interval '${every}') t ${COURSE}`
}

/** Some fifty a day. */
export function eventRows(): string {
  return `insert into overlay_events (overlay_id, at, kind, text)
    select o.id, t, case when random() < 0.5 then 'agent-unheard' else 'agent-heard' end, 'tar-01 is unheard'
    from overlays o cross join generate_series(?::timestamptz, ?::timestamptz - interval '1 second', interval '29 minutes') t`
}

/** Agents with their last reports, each linked to the eight nearest by number; a number in snapshots for each. */
export function agentRows(nodes: number): string[] {
  return [
    `insert into agents (overlay_id, name, public_key, labels, version, joined_at)
     select o.id, 'tar-' || lpad(n::text, 4, '0'), 'p', jsonb_build_object('office', (array['Tarnwick', 'Gullhythe', 'Pinnet Bay',
       'Eelholm'])[1 + n % 4], 'berth', n::text), '0.1.0', now() - interval '366 days' + n * interval '1 second'
     from overlays o cross join generate_series(1, ${nodes}) n`,
    `insert into snapshot_nodes (overlay_id, number, agent_id, name, labels)
     select overlay_id, row_number() over (partition by overlay_id order by name), id, name, labels from agents`,
    `insert into agent_states (agent_id, overlay_id, incarnation, report_number, orders_sequence, sums, node, received_at)
     select n.agent_id, n.overlay_id, 'now', 900, 9,
       jsonb_build_object('attached', 1, 'colonies', (select jsonb_agg(jsonb_build_object('colony', c, 'seeding', 811 + c, 'present', 1,
         'counters', jsonb_build_object('seeded', 200, 'births', 90000, 'kills', 90000, 'culls', 0, 'dropped', 0, 'sent', 100000,
           'received', 100000, 'walkerTime', 123456789, 'occupancyX', 123456, 'occupancyY', 123456, 'linkTime', 12345),
         'heldX', 100, 'heldY', 100, 'mean', 1)) from generate_series(0, 4) c), 'energies', '[1,2,3,4,5,6,7,8,9,10,11,12,13,14,15]'::jsonb,
         'moments', '[1,2,3,4,5,6,7,8,9,10,11,12,13,14,15]'::jsonb, 'linkEnds', 8, 'linkEndWeight', 8192, 'sweep', null),
       jsonb_build_object('degree', 8, 'weightedDegree', 7.8, 'linksKnown', 8, 'value', jsonb_build_object('sweep', 1, 'value', 0.5),
         'links', (select jsonb_agg(jsonb_build_object('peer', p.agent_id, 'weight', 0.97, 'share', 0.01)) from snapshot_nodes p
           where p.overlay_id = n.overlay_id and abs(p.number - n.number) between 1 and 4),
         'version', '0.1.0', 'uptimeSeconds', 86400), now()
     from snapshot_nodes n`,
  ]
}
