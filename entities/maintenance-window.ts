import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { Repeats } from '@/lib/warn/window'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'
import { UserSchema } from './user'

/** A time in which what is found is recorded and wakes nobody. */
export const MaintenanceWindowSchema = defineEntity({
  name: 'MaintenanceWindow',
  tableName: 'maintenance_windows',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    team: () => p.manyToOne(TeamSchema).ref(false),
    /** Only what concerns nodes with this label; null for the whole overlay. */
    label: p.json<{ key: string; value: string }>().nullable(),
    reason: p.text(),
    /** Of the first, where it repeats. */
    startsAt: p.datetime(),
    endsAt: p.datetime(),
    repeats: p.json<Repeats>().nullable(),
    createdBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    createdAt: p.datetime(),
    /** Ended by hand, all of it. */
    endedAt: p.datetime().nullable(),
  },
})
export interface MaintenanceWindow extends InferEntity<typeof MaintenanceWindowSchema> {}
