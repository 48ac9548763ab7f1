import Link from 'next/link'
import { firstPageOf } from '@/lib/policy/navigation'
import { currentlySigned } from '@/lib/server/http/signed'

/** 403: someone is signed in, but their roles do not cover the page. */
export default async function Forbidden() {
  const signed = await currentlySigned()
  const home = firstPageOf(signed?.membership.roles ?? [])
  return (
    <main id="main" className="mx-auto max-w-page px-10 py-18 max-sm:px-5">
      <section className="border-t border-ink pt-6">
        <h1>This page is for other work than yours</h1>
        <p className="mt-2 max-w-measure">
          You are signed in{signed ? ` as ${signed.person.name}` : ''}, and nothing is wrong with your
          account: your roles do not cover this page. If your work needs it, ask your administrator for the
          role.
        </p>
        <p className="mt-4">
          <Link href={home}>Go to where your work begins</Link>
        </p>
      </section>
    </main>
  )
}
