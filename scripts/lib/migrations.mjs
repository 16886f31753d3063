/** What scripts/migrate.ts printed, in a few words; null when nothing was to be applied. */
export function describeMigrations(output) {
  const last = output.trim().split('\n').at(-1)
  const { applied } = JSON.parse(last)
  if (!Array.isArray(applied))
    throw new Error(`scripts/migrate.ts says ${last}, which is no list of migrations.`)
  return applied.length === 0 ? null : `applied ${applied.length}`
}
