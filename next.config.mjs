/** What every answer says to the browser; the content policy itself needs a nonce a request and is set in proxy.ts. */
const securityHeaders = [
  { key: 'X-Content-Type-Options', value: 'nosniff' },
  { key: 'Referrer-Policy', value: 'same-origin' },
  { key: 'X-Frame-Options', value: 'SAMEORIGIN' },
  { key: 'Cross-Origin-Opener-Policy', value: 'same-origin' },
  { key: 'Permissions-Policy', value: 'camera=(self), microphone=(), geolocation=(), payment=()' },
]

/** @type {import('next').NextConfig} */
const config = {
  // Tests and a running server each build into a folder of their own.
  distDir: process.env.NEXT_DIST_DIR || '.next',
  poweredByHeader: false,
  reactStrictMode: true,
  // Compression holds server-sent events back.
  compress: false,
  // `npm run check` checks the types of everything; a build must not rewrite tsconfig.json, so it gets one that extends it.
  typescript: { ignoreBuildErrors: true, tsconfigPath: 'app/tsconfig.json' },
  experimental: { authInterrupts: true },
  serverExternalPackages: [
    '@node-rs/argon2',
    'graphile-worker',
    'next-auth',
    'nodemailer',
    'pg',
    'pino',
    'smtp-server',
  ],
  headers: async () => [{ source: '/:path*', headers: securityHeaders }],
}

export default config
