'use client'

import { useState } from 'react'
import { Button } from '@/components/ui/Button'

/** A value to be taken elsewhere, with a button that copies it. */
export function CopyField({ label, value }: { label: string; value: string }) {
  const [copied, setCopied] = useState(false)
  const copy = async () => {
    await navigator.clipboard.writeText(value)
    setCopied(true)
    setTimeout(() => setCopied(false), 2000)
  }
  return (
    <div className="flex items-center gap-3 border-t border-rule py-2">
      <div className="min-w-0 flex-1">
        <p className="text-1 text-ink-3">{label}</p>
        <p className="fig text-[14px] break-all">{value}</p>
      </div>
      <Button size="small" onClick={copy} aria-label={`Copy ${label.toLowerCase()}`}>
        {copied ? 'Copied' : 'Copy'}
      </Button>
    </div>
  )
}
