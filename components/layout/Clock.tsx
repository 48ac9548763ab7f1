'use client'

import { useEffect, useState } from 'react'
import { zonedStamp } from '@/lib/format/clock'

/** The building's own time with its zone; moves with the minute once the page lives. */
export function Clock({ nowS, timeZone }: { nowS: number; timeZone: string }) {
  const [shownS, setShownS] = useState(nowS)
  useEffect(() => {
    const tick = () => setShownS(Date.now() / 1000)
    tick()
    const timer = setInterval(tick, 5000)
    return () => clearInterval(timer)
  }, [])
  const { day, clock, zone } = zonedStamp(shownS, timeZone)
  return (
    <time dateTime={new Date(shownS * 1000).toISOString()} suppressHydrationWarning title={timeZone}>
      <span className="max-[420px]:hidden">{day} </span>
      <span className="fig">{clock}</span> {zone}
    </time>
  )
}
