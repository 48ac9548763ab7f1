'use client'

import { useState } from 'react'
import { Button } from '@/components/ui/Button'
import { MarginSection, WithMargin } from '@/components/ui/Page'
import { flowWords, intervalWords, rateWords } from '@/lib/format/rates'
import { reasonsPhrase } from '@/lib/format/reasons'
import { localClock } from '@/lib/time'
import type { Decision as Choice, DecayDetail } from '@/lib/wire/decays'
import { Checks } from './Checks'
import { DecayCharts } from './DecayCharts'
import { Decision } from './Decision'
import { useRefit, type Window } from './use-refit'

type Figures = {
  rate: number | null
  low: number | null
  high: number | null
  refused: boolean
  reasons: DecayDetail['reasons']
}

/** One decay under the hand: the sentence is the title and follows the window; Ebbmark's own fit never leaves the page. */
export function DecayWorkbench({
  decay,
  save,
  beside,
  sofar,
}: {
  decay: DecayDetail
  /** null for those who may look but not decide */
  save: Parameters<typeof Decision>[0]['save'] | null
  beside: React.ReactNode
  sofar: React.ReactNode
}) {
  const own: Window = { fromS: decay.startS, toS: decay.endS }
  const [window, setWindow] = useState(own)
  const [choice, setChoice] = useState<Choice | null>(decay.decision ?? null)
  const moved = window.fromS !== own.fromS || window.toS !== own.toS
  const { refit, curve } = useRefit(decay, window)
  const figures: Figures = moved
    ? {
        rate: refit.ratePerHour,
        low: refit.lowPerHour,
        high: refit.highPerHour,
        refused: refit.quality === 'refused',
        reasons: refit.reasons,
      }
    : {
        rate: decay.rate,
        low: decay.rateLow,
        high: decay.rateHigh,
        refused: decay.quality === 'refused',
        reasons: decay.reasons,
      }
  const windowWords = `${localClock(window.fromS, decay.timeZone)} to ${localClock(window.toS, decay.timeZone)}`
  const background = moved ? refit.background : (decay.background ?? refit.background)
  const move = (next: Window) => {
    setWindow(next)
    setChoice('keep with window')
  }
  return (
    <WithMargin
      margin={
        <>
          {save && (
            <MarginSection title="Your decision">
              <Decision
                decay={decay}
                window={window}
                moved={moved}
                windowWords={windowWords}
                choice={choice}
                onChoice={setChoice}
                save={save}
              />
            </MarginSection>
          )}
          {beside}
          {sofar}
        </>
      }
    >
      {save && (
        <p className="no-print sticky top-0 z-20 -mx-5 border-b border-rule bg-paper px-5 py-[9px] text-2 md:hidden">
          <a href="#decision">{moved ? 'Keep this window, or decide otherwise' : 'Your decision'}</a>
        </p>
      )}
      <h1 aria-live="polite" className="mt-1 max-w-[34em] text-[29px] leading-[1.25] font-[400]">
        <Finding decay={decay} figures={figures} windowWords={windowWords} />
      </h1>
      <p className="mt-2 mb-6 text-ink-2">
        <Meaning decay={decay} figures={figures} />
        {moved && (
          <>
            {' '}
            Ebbmark’s own fit:{' '}
            {decay.rate === null
              ? intervalWords(decay.rateLow, decay.rateHigh) || 'none'
              : `${rateWords(decay.rate)} (${intervalWords(decay.rateLow, decay.rateHigh)})`}
            .{' '}
            <Button look="text" size="small" onClick={() => setWindow(own)}>
              Back to it
            </Button>
          </>
        )}
      </p>
      <DecayCharts
        decay={decay}
        window={window}
        curve={curve}
        backgroundPpm={background?.ppm ?? null}
        onWindow={move}
      />
      <Checks
        title={`Why this ${moved ? 'window' : 'decay'} is ${moved ? refit.quality : decay.quality}`}
        checks={moved ? refit.checks : decay.checks}
        method={decay.methodVersion}
        note={intervalNote(moved ? refit : decay, background)}
      />
    </WithMargin>
  )
}

function Finding({
  decay,
  figures,
  windowWords,
}: {
  decay: DecayDetail
  figures: Figures
  windowWords: string
}) {
  const interval = intervalWords(figures.low, figures.high)
  if (figures.refused || !interval) {
    return (
      <>
        <b>No figure</b> for {windowWords}, because{' '}
        {reasonsPhrase(figures.reasons) || 'the readings do not carry one'}.
      </>
    )
  }
  if (figures.rate === null) {
    return (
      <>
        Air-change rate <b>{interval} per hour</b>, {windowWords}, {modeWords(decay.mode)}.
      </>
    )
  }
  return (
    <>
      Air-change rate <b>{rateWords(figures.rate)} per hour</b> ({interval}), {windowWords},{' '}
      {modeWords(decay.mode)}. Mean age of air {Math.round(60 / figures.rate)} min if well mixed.
    </>
  )
}

const modeWords = (mode: string) => (mode === 'unknown' ? 'mode unknown' : mode)

/** What the rate comes to as outdoor air, where it is outdoor air. */
function Meaning({ decay, figures }: { decay: DecayDetail; figures: Figures }) {
  if (figures.rate === null || figures.low === null || figures.high === null) return null
  if (!decay.isOutdoorAir)
    return (
      <>A dilution rate: the air may be partly recirculated, so it says nothing of outdoor air per person.</>
    )
  const flow = (rate: number) => (rate * decay.volumeM3) / 3.6
  const each = decay.designHeadcount
    ? `: ${(flow(figures.rate) / decay.designHeadcount).toFixed(1)} L/s per person for the ${decay.designHeadcount} it is meant for`
    : ''
  return (
    <>
      {flowWords(flow(figures.rate))} L/s of outdoor air ({flowWords(flow(figures.low))} to{' '}
      {flowWords(flow(figures.high))}, before the volume’s own uncertainty){each}.
    </>
  )
}

/** What the interval holds, in words. */
function intervalNote(
  fit: Pick<DecayDetail, 'uncertaintyParts' | 'lagOneCorrelation' | 'effectivePoints'>,
  background: { ppm: number; standardUncertaintyPpm: number; origin: string } | null,
): string | undefined {
  const parts = fit.uncertaintyParts
  if (!parts) return undefined
  const percent = (part: number) => `${(part * 100).toFixed(1)} %`
  const lean =
    fit.lagOneCorrelation === null || fit.effectivePoints === null
      ? ''
      : `, with readings that lean on each other (lag-one correlation ${fit.lagOneCorrelation.toFixed(2)}, worth ${Math.round(fit.effectivePoints)} independent ones)`
  const level = background
    ? ` (${Math.round(background.ppm)} ± ${background.standardUncertaintyPpm.toFixed(0)} ppm, ${background.origin})`
    : ''
  return `The interval holds the fit (${percent(parts.regression)})${lean}, the background (${percent(parts.background)})${level} and the choice of window and model (${percent(parts.model)}), as standard uncertainties of the rate.`
}
