/** Debian packages that are missing, installed as root or through `sudo -n`; else one sentence on what to do. */
import { existsSync, mkdirSync, rmSync, writeFileSync } from 'node:fs'
import { dirname } from 'node:path'
import { run } from './commands.mjs'

const CREATE_CLUSTER_CONFIG = '/etc/postgresql-common/createcluster.d/thinspan.conf'

/** How the packages get on the machine, given who we are and what is there. */
export function planInstall({ packages, hasApt, isRoot, canSudo, instead }) {
  if (packages.length === 0) return { action: 'nothing' }
  const names = packages.join(' ')
  if (!hasApt) {
    return {
      action: 'refuse',
      sentence: `Thinspan needs ${names} and finds no apt-get: install it by hand, or ${instead}.`,
    }
  }
  if (isRoot) return { action: 'install', prefix: [] }
  if (canSudo) return { action: 'install', prefix: ['sudo', '-n'] }
  return {
    action: 'refuse',
    sentence: `Thinspan needs ${names}: run "sudo apt-get install ${names}" once, or ${instead}.`,
  }
}

export async function ensurePackages(packages, { instead, signal }) {
  const hasApt = existsSync('/usr/bin/apt-get')
  const isRoot = process.getuid() === 0
  const asksSudo = packages.length > 0 && hasApt && !isRoot
  const canSudo =
    asksSudo &&
    (await run('sudo', ['-n', 'true'], { signal }).then(
      () => true,
      () => false,
    ))
  const plan = planInstall({ packages, hasApt, isRoot, canSudo, instead })
  if (plan.action === 'refuse') throw new Error(plan.sentence)
  if (plan.action === 'nothing') return
  const withoutCluster = packages.includes('postgresql')
  const root = (...command) =>
    run(plan.prefix[0] ?? command[0], [...plan.prefix, ...command].slice(1), { signal })
  if (withoutCluster) await forbidDebianCluster(root, isRoot)
  try {
    await root('apt-get', '-o', 'DPkg::Lock::Timeout=120', 'update')
    await root(
      ...['env', 'DEBIAN_FRONTEND=noninteractive', 'apt-get', '-o', 'DPkg::Lock::Timeout=120'],
      ...['install', '-y', '--no-install-recommends', ...packages],
    )
  } catch (error) {
    throw new Error(
      `apt-get could not install ${packages.join(' ')} (${instead} to go without):\n${error.message}`,
    )
  } finally {
    if (withoutCluster) await allowDebianCluster(root, isRoot)
  }
}

/** Debian's package would make and start a cluster of its own on installation; the file is only for that moment. */
async function forbidDebianCluster(root, isRoot) {
  const text = 'create_main_cluster = false\n'
  if (isRoot) {
    mkdirSync(dirname(CREATE_CLUSTER_CONFIG), { recursive: true })
    return writeFileSync(CREATE_CLUSTER_CONFIG, text)
  }
  await root('mkdir', '-p', dirname(CREATE_CLUSTER_CONFIG))
  await root('sh', '-c', `printf '${text.trim()}\\n' > ${CREATE_CLUSTER_CONFIG}`)
}

async function allowDebianCluster(root, isRoot) {
  if (isRoot) return rmSync(CREATE_CLUSTER_CONFIG, { force: true })
  await root('rm', '-f', CREATE_CLUSTER_CONFIG)
}
