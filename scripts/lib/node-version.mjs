const LEAST = [20, 12]

export function requireNode(version) {
  const [major = 0, minor = 0] = version.split('.').map(Number)
  if (major > LEAST[0] || (major === LEAST[0] && minor >= LEAST[1])) return
  throw new Error(
    `Thinspan needs Node ${LEAST.join('.')} or newer and this is ${version}: install a newer Node, then try again.`,
  )
}
