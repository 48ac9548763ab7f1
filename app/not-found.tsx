import Link from 'next/link'
import { paths } from '@/lib/paths'

/** 404: no such page, or a thing that is not this person's to see; the two look alike on purpose. */
export default function NotFound() {
  return (
    <main id="main" className="mx-auto max-w-page px-10 py-18 max-sm:px-5">
      <section className="border-t border-ink pt-6">
        <h1>There is nothing here</h1>
        <p className="mt-2 max-w-measure">
          The address is mistyped, the thing has moved, or it is not among what you may see. Nothing was
          changed.
        </p>
        <p className="mt-4">
          <Link href={paths.home()}>Go to where your work begins</Link>
        </p>
      </section>
    </main>
  )
}
