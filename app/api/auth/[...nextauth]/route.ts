import NextAuth from 'next-auth'
import { authOptions } from '@/lib/server/auth/options'
import { tellNextAuthItsAddress } from '@/lib/server/env'

type Context = { params: Promise<{ nextauth: string[] }> }

/** What of next-auth is used; its other addresses (the browser's log among them) do not exist here. */
const used = ['csrf', 'callback', 'session', 'signin', 'signout', 'error']

/** next-auth's own addresses: csrf, callback/credentials, session, signout. Open by their nature; each checks its own token. */
async function handler(request: Request, context: Context): Promise<Response> {
  const { nextauth } = await context.params
  if (!used.includes(nextauth[0] ?? '')) return new Response(null, { status: 404 })
  tellNextAuthItsAddress()
  return NextAuth(request as never, context as never, authOptions()) as Promise<Response>
}

export { handler as GET, handler as POST }
