'use client'

import './globals.css'

/** When even the frame round the pages fails. */
export default function GlobalError({
  error,
  reset,
}: {
  error: Error & { digest?: string }
  reset: () => void
}) {
  return (
    <html lang="en">
      <body>
        <main className="mx-auto max-w-page px-10 pt-12 max-sm:px-5">
          <title>Ebbmark</title>
          <h1>Ebbmark could not be drawn</h1>
          <p className="mt-3 max-w-measure">
            The web server met an error before the page began. Readings go on being stored; nothing was
            changed. Try again in a moment.
          </p>
          {error.digest && (
            <p className="mt-2 text-2 text-ink-3">
              If it stays, quote <span className="fig">{error.digest}</span> to your administrator.
            </p>
          )}
          <button
            type="button"
            onClick={reset}
            className="mt-4 h-control rounded-2 border border-edge px-4 font-[600]"
          >
            Try again
          </button>
        </main>
      </body>
    </html>
  )
}
