import { GET as directory } from './directory/route'
import { POST as enrol } from './enrol/route'
import { POST as key } from './key/route'
import { POST as leave } from './leave/route'
import { POST as report } from './report/route'
import { POST as session } from './session/route'

/** All that agents ask of a collector, for servers without the web framework. */
export const AGENT_ROUTES = {
  'POST /api/agent/enrol': enrol,
  'POST /api/agent/session': session,
  'POST /api/agent/report': report,
  'POST /api/agent/key': key,
  'POST /api/agent/leave': leave,
  'GET /api/agent/directory': directory,
} as const
