import path from 'node:path'
import { z } from 'zod'

const port = (fallback: number) => z.coerce.number().int().min(1).max(65535).default(fallback)
const flag = z
  .enum(['0', '1'])
  .default('0')
  .transform((value) => value === '1')

/** Days that something is kept; empty keeps everything. */
const keptDays = z.coerce.number().int().min(30).optional()

const schema = z.object({
  NODE_ENV: z.enum(['development', 'production', 'test']).default('development'),
  EBBMARK_DATA_DIR: z
    .string()
    .default('.data')
    .transform((dir) => path.resolve(dir)),
  DATABASE_URL: z.string().url(),
  DATABASE_OWNER_URL: z.string().url().optional(),
  DATABASE_DIRECT_URL: z.string().url().optional(),
  HOST: z.string().default('127.0.0.1'),
  PORT: port(3000),
  MQTT_HOST: z.string().default('127.0.0.1'),
  MQTT_PORT: port(1883),
  MQTT_URL: z
    .string()
    .regex(/^mqtts?:\/\/./, 'expected mqtt://host:port or mqtts://host:port')
    .optional(),
  MQTT_CA_FILE: z.string().optional(),
  MQTT_CLIENT_ID: z
    .string()
    .regex(/^[A-Za-z0-9._:-]{1,40}$/, 'expected 1 to 40 of letters, digits, . _ : -')
    .default('ebbmark'),
  INGEST_WORKERS: z.coerce.number().int().min(1).max(64).default(1),
  INGEST_WORKER: z.coerce.number().int().min(1).max(64).default(1),
  MQTT_SENSOR_READINGS_PER_S: z.coerce.number().positive().default(100),
  SMTP_HOST: z.string().default('127.0.0.1'),
  SMTP_PORT: port(1025),
  SMTP_USER: z.string().optional(),
  SMTP_PASSWORD: z.string().optional(),
  MAIL_FROM: z.string().default('Ebbmark <digest@ebbmark.example>'),
  PUBLIC_URL: z.string().url().optional(),
  NEXTAUTH_SECRET: z.string().min(32).optional(),
  EBBMARK_SECRET_KEY: z
    .string()
    .regex(/^[0-9a-fA-F]{64}$/, 'expected 64 hexadecimal digits (openssl rand -hex 32)')
    .optional(),
  EBBMARK_DEMO: flag,
  EBBMARK_READINGS_KEPT_DAYS: keptDays,
  EBBMARK_ROLLUPS_KEPT_DAYS: keptDays,
  EBBMARK_ARCHIVE: z.enum(['csv', 'none']).default('csv'),
  EBBMARK_METRICS_TOKEN: z.string().min(20).optional(),
  EBBMARK_DISK_TIGHT_PCT: z.coerce.number().min(0).max(90).default(15),
  EBBMARK_DISK_FULL_PCT: z.coerce.number().min(0).max(90).default(5),
  LOG_LEVEL: z.enum(['trace', 'debug', 'info', 'warn', 'error', 'fatal', 'silent']).default('info'),
})

export type Env = z.infer<typeof schema>

/** Parses an environment; throws one error that names every variable at fault and what was expected. */
export function parseEnv(source: Record<string, string | undefined>): Env {
  const given = Object.fromEntries(Object.entries(source).filter(([, value]) => value !== ''))
  const parsed = schema.safeParse(given)
  if (parsed.success) return parsed.data
  const problems = parsed.error.issues.map((issue) => `  ${issue.path.join('.')}: ${issue.message}`)
  throw new Error(
    `The environment is not usable (.env.example explains each variable):\n${problems.join('\n')}`,
  )
}

let cached: Env | undefined

/** The environment of this process, parsed at first use (a build has none). The one place that reads process.env. */
export function env(): Env {
  // biome-ignore lint/style/noProcessEnv: the one place that reads it
  cached ??= parseEnv(process.env)
  return cached
}

/** The data folder alone, for commands that need no database. */
export function dataDir(): string {
  // biome-ignore lint/style/noProcessEnv: the one place that reads it
  return schema.shape.EBBMARK_DATA_DIR.parse(process.env.EBBMARK_DATA_DIR || undefined)
}

/** Where people reach the web application: PUBLIC_URL, else the loopback address. */
export function publicUrl(): string {
  return env().PUBLIC_URL ?? `http://${env().HOST}:${env().PORT}`
}

/** The key that seals session cookies; a process that has none cannot sign anyone in. */
export function authSecret(): string {
  const secret = env().NEXTAUTH_SECRET
  if (secret) return secret
  throw new Error('NEXTAUTH_SECRET is not set: give 32 or more random signs (npm start makes and keeps one)')
}

/** next-auth reads its own address from the environment; it is the address people use. */
export function tellNextAuthItsAddress(): void {
  // biome-ignore lint/style/noProcessEnv: the one place that touches it
  process.env.NEXTAUTH_URL = publicUrl()
}

const loopback = ['127.0.0.1', '::1', '[::1]', 'localhost']

/** Are the demo's sign-ins offered? Only in the demo, and only where none but this machine can reach it, also not through a proxy. */
export function offersDemoSignIn(): boolean {
  const { EBBMARK_DEMO, HOST } = env()
  return EBBMARK_DEMO && loopback.includes(HOST) && loopback.includes(new URL(publicUrl()).hostname)
}

/** Where sensors publish to, as an installer types it in. */
export function brokerAddress(): { host: string; port: number } {
  const { MQTT_HOST, MQTT_PORT, MQTT_URL } = env()
  if (MQTT_URL) {
    const { protocol, hostname, port: given } = new URL(MQTT_URL)
    return { host: hostname, port: Number(given || (protocol === 'mqtts:' ? 8883 : 1883)) }
  }
  return { host: MQTT_HOST === '0.0.0.0' ? new URL(publicUrl()).hostname : MQTT_HOST, port: MQTT_PORT }
}
