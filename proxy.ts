import { randomBytes } from 'node:crypto'
import { type NextRequest, NextResponse } from 'next/server'
import { env } from '@/lib/server/env'
import { PATH_HEADER } from '@/lib/server/http/headers'

/** What a page may load: our own files, and scripts that carry this answer's nonce. Style attributes are the charts' and React's. */
function contentPolicy(nonce: string): string {
  const development = env().NODE_ENV === 'development'
  return [
    `default-src 'self'`,
    `script-src 'self' 'nonce-${nonce}' 'strict-dynamic'${development ? " 'unsafe-eval'" : ''}`,
    `style-src 'self' 'unsafe-inline'`,
    `img-src 'self' data: blob:`,
    `font-src 'self' data:`,
    `connect-src 'self'${development ? ' ws:' : ''}`,
    `worker-src 'self' blob:`,
    `object-src 'none'`,
    `base-uri 'none'`,
    `form-action 'self'`,
    `frame-ancestors 'self'`,
  ].join('; ')
}

/** Before every page: its own address for the guard (to come back after sign-in), and the content policy. It protects nothing itself. */
export function proxy(request: NextRequest): NextResponse {
  const policy = contentPolicy(randomBytes(16).toString('base64'))
  const headers = new Headers(request.headers)
  headers.set(PATH_HEADER, `${request.nextUrl.pathname}${request.nextUrl.search}`)
  headers.set('Content-Security-Policy', policy)
  const response = NextResponse.next({ request: { headers } })
  response.headers.set('Content-Security-Policy', policy)
  return response
}

export const config = {
  matcher: ['/((?!api/|_next/static|_next/image|icon|manifest.webmanifest|fonts/).*)'],
}
