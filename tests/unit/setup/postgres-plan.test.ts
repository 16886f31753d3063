import { describe, expect, it } from 'vitest'
import {
  chooseVersion,
  firstClosedFolder,
  parseAccount,
  parsePidFile,
  planCluster,
} from '@/scripts/lib/postgres-plan.mjs'

const dataFolder = '/srv/tarnwick/postgres/data'
const pidFile = { pid: 4711, dataFolder, port: 40123, ready: true }

describe('planCluster', () => {
  const cases = [
    [
      'makes a cluster where there is none',
      { initialised: false, pidFile: null, running: null },
      { action: 'create' },
    ],
    [
      'makes it anew over what an interrupted initdb left',
      { initialised: false, pidFile, running: null },
      { action: 'create' },
    ],
    [
      'starts one that was stopped in order',
      { initialised: true, pidFile: null, running: null },
      { action: 'start', clearPidFile: false },
    ],
    [
      'adopts one that outlived its parent',
      { initialised: true, pidFile, running: dataFolder },
      { action: 'adopt', pid: 4711 },
    ],
    [
      'starts over the pid file of a dead server',
      { initialised: true, pidFile, running: null },
      { action: 'start', clearPidFile: true },
    ],
    [
      'leaves alone another server that was given the same pid',
      { initialised: true, pidFile, running: '/srv/gullhythe/postgres/data' },
      { action: 'start', clearPidFile: true },
    ],
  ] as const
  it.each(cases)('%s', (_, state, plan) => {
    expect(planCluster({ ...state, dataFolder })).toEqual(plan)
  })
})

describe('parsePidFile', () => {
  it('reads pid, folder, port and readiness', () => {
    const text = `4711\n${dataFolder}\n1764500000\n40123\n\n127.0.0.1\n  1234567     98304\nready   \n`
    expect(parsePidFile(text)).toEqual(pidFile)
  })
  it('reads the short file of a server that is still starting', () => {
    expect(parsePidFile(`4711\n${dataFolder}\n1764500000\n`)).toEqual({
      pid: 4711,
      dataFolder,
      port: null,
      ready: false,
    })
  })
  it.each(['', 'not a pid\n', '-3\n/x\n'])('has nothing for %j', (text) => {
    expect(parsePidFile(text)).toBeNull()
  })
})

describe('chooseVersion', () => {
  it('takes the newest by number, not by letter', () => {
    expect(chooseVersion(['9', '15', '17', '8'], null)).toBe('17')
  })
  it('keeps to the version that made the cluster', () => {
    expect(chooseVersion(['15', '17'], '15')).toBe('15')
  })
  it('has none where none is installed', () => {
    expect(chooseVersion([], null)).toBeNull()
  })
  it('says what to install when the version that made the cluster is gone', () => {
    expect(() => chooseVersion(['17'], '15')).toThrow(
      'The database was made by PostgreSQL 15 (installed: 17): install postgresql-15, or move the folder away to begin anew.',
    )
  })
})

describe('firstClosedFolder', () => {
  const account = { uid: 101, gid: 104, home: '/var/lib/postgresql' }
  const root = { path: '/', mode: 0o40755, uid: 0, gid: 0 }
  it('finds the home that only its owner may enter', () => {
    const home = { path: '/home/mira', mode: 0o40700, uid: 1000, gid: 1000 }
    expect(firstClosedFolder([root, home], account)).toBe('/home/mira')
  })
  it('passes where others may pass without looking', () => {
    expect(
      firstClosedFolder([root, { path: '/home/mira', mode: 0o40711, uid: 1000, gid: 1000 }], account),
    ).toBeNull()
  })
  it('goes by the group where the group is ours', () => {
    expect(firstClosedFolder([root, { path: '/srv/x', mode: 0o40750, uid: 0, gid: 104 }], account)).toBeNull()
    expect(firstClosedFolder([root, { path: '/srv/x', mode: 0o40701, uid: 0, gid: 104 }], account)).toBe(
      '/srv/x',
    )
  })
})

describe('parseAccount', () => {
  const passwd =
    'root:x:0:0:root:/root:/bin/bash\npostgres:x:101:104:PostgreSQL:/var/lib/postgresql:/bin/bash\n'
  it('finds ids and home', () => {
    expect(parseAccount(passwd, 'postgres')).toEqual({ uid: 101, gid: 104, home: '/var/lib/postgresql' })
  })
  it('has none for a user who is not there', () => {
    expect(parseAccount(passwd, 'post')).toBeNull()
  })
})
