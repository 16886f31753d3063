/** @type {import('next').NextConfig} */
const config = {
  // The tests build into a folder of their own, so that they can run beside a server.
  distDir: process.env.THINSPAN_DIST_DIR ?? '.next',
  // A configuration that extends another is one that the build does not rewrite. Types are checked by `npm test`:
  // a start need not wait for it.
  typescript: { tsconfigPath: 'tsconfig.next.json', ignoreBuildErrors: true },
  agentRules: false,
  experimental: { agentUpgrade: false },
  turbopack: { root: import.meta.dirname },
  outputFileTracingRoot: import.meta.dirname,
  poweredByHeader: false,
  serverExternalPackages: [
    '@mikro-orm/core',
    '@mikro-orm/migrations',
    '@mikro-orm/postgresql',
    '@node-rs/argon2',
    'esbuild',
    'graphile-worker',
    'nodemailer',
    'pdfkit',
    'pg',
    'pino',
    'pino-pretty',
    'standardwebhooks',
    'twilio',
  ],
}

export default config
