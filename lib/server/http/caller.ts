import { headers } from 'next/headers'
import { addressIn } from '../auth/address'
import type { Caller } from '../auth/sign-in'

/** Where the request at hand comes from. */
export async function currentCaller(): Promise<Caller> {
  const given = await headers()
  return { address: addressIn(given), userAgent: given.get('user-agent') }
}
