/** What is done now and then by whichever process comes first. */
export { forgetEvents } from './events'
export { Jobs, type JobsComponents } from './jobs'
export { rollUp, rollUpAgain } from './roll-up'
export { forgetNodes, thinSnapshots } from './snapshots'
export type { Stretch } from './stretch'
export { TASKS, type Task, type TaskComponents } from './tasks'
