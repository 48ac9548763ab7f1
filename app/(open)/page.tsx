import { redirect } from 'next/navigation'
import { paths } from '@/lib/paths'
import { firstPageOf } from '@/lib/policy/navigation'
import { currentlySigned } from '@/lib/server/http/signed'

/** The bare address leads to where the person's work begins, or to sign-in. */
export default async function HomePage() {
  const signed = await currentlySigned()
  redirect(signed ? firstPageOf(signed.membership.roles) : paths.signIn())
}
