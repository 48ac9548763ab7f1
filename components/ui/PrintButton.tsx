'use client'

import { Button } from './Button'

/** Prints the page as it is shown. */
export function PrintButton() {
  return (
    <Button look="text" size="small" onClick={() => window.print()}>
      Print
    </Button>
  )
}
