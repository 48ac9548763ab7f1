'use client'

import { useEffect, useState } from 'react'

/** Epoch seconds that move on by themselves. Starts at the server's instant, so that both draw the same words first. */
export function useNow(serverS: number, everyMs = 1000): number {
  const [nowS, setNowS] = useState(serverS)
  useEffect(() => {
    // the server's clock counts, not this device's, which may be wrong
    const ahead = Date.now() / 1000 - serverS
    const tick = () => setNowS(Date.now() / 1000 - ahead)
    const timer = setInterval(tick, everyMs)
    return () => clearInterval(timer)
  }, [serverS, everyMs])
  return nowS
}
