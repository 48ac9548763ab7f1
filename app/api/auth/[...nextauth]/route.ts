import NextAuth from 'next-auth'
import { authOptions } from '@/lib/server/auth/options'
import { tellNextAuthItsAddress } from '@/lib/server/env'

type Context = { params: Promise<{ nextauth: string[] }> }

/** next-auth's own addresses: csrf, callback/credentials, session, signout. Open by their nature; each checks its own token. */
async function handler(request: Request, context: Context): Promise<Response> {
  tellNextAuthItsAddress()
  return NextAuth(request as never, context as never, authOptions()) as Promise<Response>
}

export { handler as GET, handler as POST }
