'use client'

import { useMemo } from 'react'
import { TimeChart } from '@/components/charts/TimeChart'
import type { ChartWindow } from '@/components/charts/types'
import type { DecayDetail } from '@/lib/wire/decays'
import { leftOverSpec, linearEnds, linearSpec, logSpec, readingsTable } from './chart-specs'
import type { Curve, Window } from './use-refit'

/** The decay twice: linear at the left, above background on a log scale at the right, with what the fit leaves over under it. */
export function DecayCharts({
  decay,
  window,
  curve,
  backgroundPpm,
  onWindow,
}: {
  decay: DecayDetail
  window: Window
  curve: Curve | null
  backgroundPpm: number | null
  onWindow: (window: Window) => void
}) {
  const { timeS } = decay.series
  const fromS = timeS[0] ?? decay.startS
  const toS = timeS.at(-1) ?? decay.endS
  const handles: ChartWindow = {
    ...window,
    stopsS: timeS,
    onChange: (from, to) => onWindow({ fromS: from, toS: to }),
  }
  const linear = useMemo(
    () => linearSpec(decay, window, curve, backgroundPpm),
    [decay, window, curve, backgroundPpm],
  )
  const log = useMemo(
    () => logSpec(decay, window, curve, backgroundPpm),
    [decay, window, curve, backgroundPpm],
  )
  const leftOver = useMemo(() => leftOverSpec(curve), [curve])
  const ends = useMemo(() => linearEnds(decay), [decay])
  const most = Math.max(15, ...(curve?.leftOverPpm ?? []).map(Math.abs))
  const highest = Math.max(200, ...decay.series.co2Ppm.map((ppm) => ppm - (backgroundPpm ?? 400)))
  const zone = decay.timeZone
  return (
    <div className="grid gap-12 md:grid-cols-2">
      <div className="min-w-0">
        <h2 className="mb-1 text-2 font-normal text-ink-2">CO2, ppm</h2>
        <TimeChart
          label="CO2 with the window of the fit"
          spec={linear}
          axis={ends}
          fromS={fromS}
          toS={toS}
          timeZone={zone}
          heightPx={340}
          window={handles}
          table={readingsTable(decay, window, zone)}
        />
        <p className="mt-2 text-2 text-ink-3">
          Filled: used in the fit. Open: not used. Drag either edge of the window; arrow keys move it by one
          reading.
        </p>
      </div>
      <div className="min-w-0">
        <h2 className="mb-1 text-2 font-normal text-ink-2">CO2 above background, ppm, log scale</h2>
        {backgroundPpm === null ? (
          <p className="text-2 text-ink-2">
            The level it falls towards is not known well enough to draw this chart.
          </p>
        ) : (
          <>
            <TimeChart
              label="CO2 above background on a log scale, with the fitted line and its band"
              spec={log}
              axis={{ low: 10, high: highest * 1.3, scale: 'log' }}
              fromS={fromS}
              toS={toS}
              timeZone={zone}
              heightPx={340}
              window={handles}
            />
            <h2 className="mt-4 mb-1 text-2 font-normal text-ink-2">Left over after the fit, ppm</h2>
            <TimeChart
              label="Residuals of the fit"
              spec={leftOver}
              axis={{ low: -most, high: most, most: 3 }}
              fromS={fromS}
              toS={toS}
              timeZone={zone}
              heightPx={110}
            />
          </>
        )}
      </div>
    </div>
  )
}
