/** Members that no log line may show, wherever they stand: this is the net below the rule that nobody logs them. */
const SECRETS = [
  'authorization',
  'code',
  'key',
  'keys',
  'pass',
  'pendingKey',
  'privateKey',
  'secret',
  'signature',
  'token',
]

const DEPTHS = ['', '*.', '*.*.', '*.*.*.']

/** For pino. */
export const LOGGER_OPTIONS = {
  base: null,
  redact: {
    // `error.code` is what an error is called by; a joining code is never inside an error.
    paths: SECRETS.flatMap((name) => DEPTHS.map((depth) => `${depth}${name}`)).filter(
      (path) => !path.endsWith('.code'),
    ),
    censor: '[kept back]',
  },
}
