export type View = readonly [fromS: number, toS: number]

/** Ten minutes: nothing is seen by zooming in further. */
const LEAST_SPAN_S = 600

/** The view made `factor` times as long about its middle, inside the whole. */
export function zoomed(view: View, factor: number, whole: View): View {
  const span = Math.min(whole[1] - whole[0], Math.max(LEAST_SPAN_S, (view[1] - view[0]) * factor))
  const middle = (view[0] + view[1]) / 2
  return inside([middle - span / 2, middle + span / 2], whole)
}

/** The view moved by a share of its length, inside the whole. */
export function panned(view: View, share: number, whole: View): View {
  const by = (view[1] - view[0]) * share
  return inside([view[0] + by, view[1] + by], whole)
}

function inside(view: View, whole: View): View {
  if (view[1] - view[0] >= whole[1] - whole[0]) return whole
  if (view[0] < whole[0]) return [whole[0], whole[0] + view[1] - view[0]]
  return view[1] > whole[1] ? [whole[1] - (view[1] - view[0]), whole[1]] : view
}

/** The view that a key asks for: plus and minus zoom, arrows move by a fifth, 0 shows all; null for any other key. */
export function keyView(key: string, view: View, whole: View): View | null {
  if (key === '+' || key === '=') return zoomed(view, 0.5, whole)
  if (key === '-') return zoomed(view, 2, whole)
  if (key === 'ArrowLeft') return panned(view, -0.2, whole)
  if (key === 'ArrowRight') return panned(view, 0.2, whole)
  return key === '0' ? whole : null
}
