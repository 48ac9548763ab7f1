import { createHash } from 'node:crypto'
import type { NextRequest } from 'next/server'

/** Data as JSON with an ETag of its content; 304 without a body when the caller already has it. Never cached by anyone between. */
export function jsonResponse(request: NextRequest, data: unknown, status = 200): Response {
  const body = JSON.stringify(data ?? null)
  const etag = `"${createHash('sha256').update(body).digest('base64url').slice(0, 27)}"`
  const headers = {
    'Content-Type': 'application/json',
    'Cache-Control': 'private, no-cache',
    Vary: 'Cookie',
    ETag: etag,
  }
  const known = request.headers.get('if-none-match')?.split(',') ?? []
  const unchanged = known.some((each) => ['*', etag].includes(each.trim().replace(/^W\//, '')))
  const reads = request.method === 'GET' || request.method === 'HEAD'
  return status === 200 && reads && unchanged
    ? new Response(null, { status: 304, headers })
    : new Response(body, { status, headers })
}
