/** The thread's own program; bundled by itself, see bundle.ts. */
import { parentPort } from 'node:worker_threads'
import { type Asked, runJob } from './jobs'

parentPort?.on('message', (asked: Asked) => parentPort?.postMessage(runJob(asked)))
