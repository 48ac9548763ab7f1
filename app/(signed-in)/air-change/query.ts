import { z } from 'zod'
import type { FilterGroup } from '@/components/ui/Filters'
import type { Sort } from '@/components/ui/Table'
import { MODES } from '@/lib/air/types'
import { type AirChangeSort, GROUPINGS, isShown, SHOWN, SORTS } from '@/lib/format/air-change'
import { withQuery } from '@/lib/format/query'
import { paths } from '@/lib/paths'
import type { AirChangeRow } from '@/lib/wire/air-change'

/** The table's state is its address. What is not understood falls back to what the page shows first. */
export const airChangePageQuery = z.object({
  mode: z.enum(MODES).catch('supply on'),
  group: z.enum(GROUPINGS).catch('verdict'),
  weeks: z.enum(['4', '12', '52']).catch('12'),
  show: z.enum(SHOWN).catch('all'),
  sort: z.enum(SORTS).catch('against basis'),
  order: z.enum(['up', 'down']).catch('up'),
})
export type AirChangePageQuery = z.infer<typeof airChangePageQuery>

const modeWords = ['supply on', 'supply reduced', 'supply off'] as const

export function filterGroups(query: AirChangePageQuery, rows: readonly AirChangeRow[]): FilterGroup[] {
  const href = (change: Partial<AirChangePageQuery>) => withQuery(paths.airChange(), query, change)
  return [
    {
      label: 'Mode',
      choices: modeWords.map((mode) => ({ word: mode, href: href({ mode }), current: query.mode === mode })),
    },
    {
      label: 'Group by',
      choices: GROUPINGS.map((group) => ({
        word: group,
        href: href({ group }),
        current: query.group === group,
      })),
    },
    {
      label: 'Weeks',
      choices: (['4', '12', '52'] as const).map((weeks) => ({
        word: weeks,
        href: href({ weeks }),
        current: query.weeks === weeks,
      })),
    },
    {
      label: 'Show',
      choices: SHOWN.map((show) => ({
        word: show,
        href: href({ show }),
        current: query.show === show,
        count: rows.filter((row) => isShown(row, show)).length,
      })),
    },
  ]
}

/** Link and arrow of a sortable head: another column starts rising, the same one turns round. */
export function sortLink(query: AirChangePageQuery, sort: AirChangeSort): Sort {
  const same = query.sort === sort
  const order = same && query.order === 'up' ? 'down' : 'up'
  return {
    direction: same ? (query.order === 'up' ? 'ascending' : 'descending') : null,
    href: withQuery(paths.airChange(), query, { sort, order }),
  }
}
