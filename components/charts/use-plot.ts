'use client'

import { useEffect } from 'react'
import type uPlot from 'uplot'
import type { Live } from './plot'

/** Makes the plot once uPlot has arrived, keeps it as wide as its place, draws it anew when the theme changes. */
export function usePlot(
  host: React.RefObject<HTMLDivElement | null>,
  height: number,
  live: React.RefObject<Live>,
  setPlot: (plot: uPlot | null) => void,
) {
  useEffect(() => {
    const root = host.current
    if (!root) return
    let plot: uPlot | null = null
    let stopped = false
    const redraw = () => plot?.redraw(false, true)
    const scheme = matchMedia('(prefers-color-scheme: dark)')
    const theme = new MutationObserver(redraw)
    const resize = new ResizeObserver(() => {
      if (plot && root.clientWidth > 0 && root.clientWidth !== plot.width)
        plot.setSize({ width: root.clientWidth, height })
    })
    Promise.all([import('./plot'), document.fonts.ready]).then(([{ makePlot }]) => {
      if (stopped) return
      plot = makePlot(root, { width: root.clientWidth, height }, () => live.current)
      setPlot(plot)
      resize.observe(root)
      theme.observe(document.documentElement, { attributes: true, attributeFilter: ['data-theme'] })
      scheme.addEventListener('change', redraw)
    })
    return () => {
      stopped = true
      resize.disconnect()
      theme.disconnect()
      scheme.removeEventListener('change', redraw)
      plot?.destroy()
      setPlot(null)
    }
  }, [host, height, live, setPlot])
}
