import { ZodError } from 'zod'
import { type FieldProblems, PROBLEMS, Refusal } from '@/lib/errors'
import { log } from '../log'

/** Field messages of a zod error, by dotted path; what concerns the whole stands under the empty name. */
export function fieldProblems(error: ZodError): FieldProblems {
  const fields: FieldProblems = {}
  for (const issue of error.issues) {
    const name = issue.path.join('.')
    fields[name] = [...(fields[name] ?? []), issue.message]
  }
  return fields
}

/** Any error as a refusal fit to be shown; what nobody foresaw is logged and shown without its text. */
export function asRefusal(error: unknown, where: string): Refusal {
  if (error instanceof Refusal) return error
  if (error instanceof ZodError) {
    return new Refusal('invalid', 'Some values are not usable; each is named with what was expected.', {
      fields: fieldProblems(error),
    })
  }
  log().error({ err: error, where }, 'an unforeseen error')
  if (isConnectionError(error)) {
    return new Refusal(
      'unavailable',
      'The database does not answer. Readings are kept by the sensors meanwhile. Try again in a minute.',
      { retryAfterSeconds: 60, cause: error },
    )
  }
  return new Refusal(
    'failed',
    'Nothing was changed. Try again; if it stays so, tell your administrator the time.',
    {
      cause: error,
    },
  )
}

const connectionCodes = [
  'ECONNREFUSED',
  'ECONNRESET',
  'ENOENT',
  'ETIMEDOUT',
  '57P01',
  '57P03',
  '08006',
  '08001',
]

function isConnectionError(error: unknown): boolean {
  for (let each = error; each instanceof Error; each = each.cause) {
    const code = (each as { code?: unknown }).code
    if (typeof code === 'string' && connectionCodes.includes(code)) return true
    if (/timeout exceeded when trying to connect|Connection terminated/.test(each.message)) return true
  }
  return false
}

/** A refusal as problem details (RFC 9457), with Retry-After where waiting helps. */
export function problemResponse(refusal: Refusal, instance: string): Response {
  const headers = new Headers({
    'Content-Type': 'application/problem+json',
    'Cache-Control': 'no-store',
  })
  if (refusal.retryAfterSeconds !== undefined) headers.set('Retry-After', String(refusal.retryAfterSeconds))
  const body = {
    type: 'about:blank',
    title: PROBLEMS[refusal.kind].title,
    status: refusal.status,
    detail: refusal.message,
    instance,
    ...(refusal.fields ? { errors: refusal.fields } : {}),
  }
  return new Response(JSON.stringify(body), { status: refusal.status, headers })
}
