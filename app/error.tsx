'use client'

import { Button } from '@/components/ui/Button'
import { Page } from '@/components/ui/Page'
import { ErrorState } from '@/components/ui/States'

/** A page that could not be drawn; what was measured is not touched by that. */
export default function PageError({
  error,
  reset,
}: {
  error: Error & { digest?: string }
  reset: () => void
}) {
  return (
    <Page className="pt-12">
      <ErrorState
        title="This page could not be drawn"
        happened="The server did not finish the page. Most often the database did not answer."
        safe="Readings go on being stored, and nothing was changed."
        todo="Try again in a moment."
        quote={error.digest}
        actions={
          <Button look="main" onClick={reset}>
            Try again
          </Button>
        }
      />
    </Page>
  )
}
