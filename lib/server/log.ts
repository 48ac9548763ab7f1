import pino, { type Logger } from 'pino'
import { env } from './env'

let logger: Logger | undefined

/** The structured log of this process (JSON lines on standard output). */
export function log(): Logger {
  logger ??= pino({ level: env().LOG_LEVEL, base: undefined, timestamp: pino.stdTimeFunctions.isoTime })
  return logger
}
