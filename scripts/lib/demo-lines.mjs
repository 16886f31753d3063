/**
 * What scripts/demo.ts tells `npm start`, one JSON object a line on standard output:
 *   {"signIn": {"email": "…", "password": "…", "role": "owner"}}
 *   {"ready": true}            the story runs and the pages show it
 *   {"note": "…"}              a sentence for the person at the terminal
 * Any other line goes to the log.
 */
export function parseDemoLine(line) {
  let value
  try {
    value = JSON.parse(line)
  } catch {
    return { kind: 'log', line }
  }
  const signIn = value?.signIn
  if (typeof signIn?.email === 'string' && typeof signIn?.password === 'string') {
    const role = typeof signIn.role === 'string' ? signIn.role : ''
    return { kind: 'signIn', email: signIn.email, password: signIn.password, role }
  }
  if (value?.ready === true) return { kind: 'ready' }
  if (typeof value?.note === 'string') return { kind: 'note', text: value.note }
  return { kind: 'log', line }
}

/** Email, password and role in columns. */
export function formatSignIns(signIns) {
  const width = (name) => Math.max(...signIns.map((signIn) => signIn[name].length))
  const [email, password] = [width('email'), width('password')]
  return signIns.map((s) => `${s.email.padEnd(email)}  ${s.password.padEnd(password)}  ${s.role}`.trimEnd())
}
