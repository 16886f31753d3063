/** What is done now and then by whichever process comes first. */
export { Jobs, type JobsComponents } from './jobs'
export { rollUp, rollUpAgain, type Stretch } from './roll-up'
export { TASKS, type Task, type TaskComponents } from './tasks'
