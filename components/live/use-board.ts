'use client'

import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useEffect, useState } from 'react'
import { paths } from '@/lib/paths'
import {
  applyChange,
  type Board,
  boardChangeSchema,
  boardSchema,
  noticeEventSchema,
} from '@/lib/wire/live-board'
import { listenTo } from './shared-stream'
import type { LiveState } from './stream'

const addressOf = (base: string, slug: string, wall: boolean) =>
  `${base}?${new URLSearchParams({ building: slug, ...(wall ? { wall: '1' } : {}) })}`

/** The stream's address for a building; each reader of it shares one connection a browser. */
export const liveAddress = (slug: string, wall = false) => addressOf(paths.api.live(), slug, wall)

const boardKey = (slug: string, wall: boolean) => ['board', slug, wall] as const

async function fetchBoard(slug: string, wall: boolean): Promise<Board> {
  const response = await fetch(addressOf('/api/v1/rooms', slug, wall), {
    headers: { Accept: 'application/json' },
  })
  // the session has ended: the page itself knows the way to sign-in and back
  if (response.status === 401) location.reload()
  if (!response.ok) throw new Error(`The rooms could not be read (${response.status}).`)
  return boardSchema.parse(await response.json())
}

/** The board as it lives: first as the server drew it, then with each change of the stream. `state` says whether changes arrive. */
export function useBoard(
  initial: Board,
  options: { wall?: boolean } = {},
): { board: Board; state: LiveState } {
  const wall = options.wall ?? false
  const { slug } = initial.building
  const client = useQueryClient()
  const [state, setState] = useState<LiveState>('waiting')
  const { data } = useQuery({
    queryKey: boardKey(slug, wall),
    queryFn: () => fetchBoard(slug, wall),
    initialData: initial,
  })

  useEffect(() => {
    const key = boardKey(slug, wall)
    client.setQueryData<Board>(key, (known) => (known && known.atS >= initial.atS ? known : initial))
  }, [client, initial, slug, wall])

  useEffect(() => {
    const key = boardKey(slug, wall)
    return listenTo(liveAddress(slug, wall), {
      onState: setState,
      onMessage: ({ event, data: sent }) => {
        if (event === 'ended') location.reload()
        if (event === 'reload') void client.refetchQueries({ queryKey: key })
        if (event !== 'rooms') return
        const change = boardChangeSchema.safeParse(sent)
        if (change.success)
          client.setQueryData<Board>(key, (known) => known && applyChange(known, change.data))
      },
    })
  }, [client, slug, wall])

  return { board: data, state }
}

/** Calls `onNotice` with the kind of each change in the building ("readings", "sensors", "night", …), and with "reload" after a pause. */
export function useNotices(slug: string, onNotice: (kind: string) => void): void {
  useEffect(
    () =>
      listenTo(liveAddress(slug), {
        onState: () => undefined,
        onMessage: ({ event, data }) => {
          const notice = noticeEventSchema.safeParse(data)
          if (event === 'notice' && notice.success) onNotice(notice.data.kind)
          if (event === 'reload') onNotice('reload')
          if (event === 'ended') location.reload()
        },
      }),
    [slug, onNotice],
  )
}
