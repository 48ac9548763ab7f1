import { createHash, timingSafeEqual } from 'node:crypto'
import { Refusal } from '@/lib/errors'

const loopback = ['127.0.0.1', '::1', '[::1]', 'localhost']

/** What decides who may read the metrics. */
export type MetricsAccess = { token: string | undefined; host: string; publicUrl: string }

/**
 * Lets a caller pass who brings the token, or anyone where no other machine can reach the server, also not through a proxy (both its
 * address and the one that people use are loopback).
 * @throws Refusal not-allowed, with what to do
 */
export function admitToMetrics(authorization: string | null, access: MetricsAccess): void {
  const { token, host, publicUrl } = access
  const given = /^Bearer\s+(\S+)$/i.exec(authorization ?? '')?.[1]
  if (given !== undefined && token !== undefined && isSame(given, token)) return
  if (given === undefined && loopback.includes(host) && loopback.includes(new URL(publicUrl).hostname)) return
  throw new Refusal(
    'not-allowed',
    'Metrics are for this machine, or for who brings EBBMARK_METRICS_TOKEN as Authorization: Bearer.',
  )
}

/** In a time that does not tell how much of it was right. */
function isSame(given: string, wanted: string): boolean {
  const digest = (text: string) => createHash('sha256').update(text).digest()
  return timingSafeEqual(digest(given), digest(wanted))
}
