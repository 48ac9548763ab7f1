import { cookies, headers } from 'next/headers'
import { forbidden, redirect } from 'next/navigation'
import { cache } from 'react'
import { type BuildingSummary, listBuildingsInScope } from '@/db/queries/people'
import { paths, safeNext } from '@/lib/paths'
import { can, type Permission } from '@/lib/policy/permissions'
import { BUILDING_COOKIE, PATH_HEADER } from './headers'
import { contextOf, currentlySigned, type SignedContext } from './signed'

/** A page's context: the person, what they may see, and the building they work on (null where the scope has none). */
export type PageContext = SignedContext & {
  buildings: BuildingSummary[]
  building: BuildingSummary | null
}

/**
 * The first line of every page of a signed-in person: `const page = await requirePage('rounds.read')`.
 * Nobody signed in: to /sign-in and back. Without the permission: 403 and app/forbidden.tsx.
 * Call it before any Suspense boundary (so no loading.tsx above a page), else the answer has left with status 200.
 */
export async function requirePage(permission: Permission): Promise<PageContext> {
  const page = await pageContext()
  if (!page) redirect(paths.signIn(safeNext((await headers()).get(PATH_HEADER)) ?? undefined))
  if (!can(page.membership.roles, permission)) forbidden()
  return page
}

/** The same context for the layout round the pages, which draws and never protects: null when nobody is signed in. */
export const pageContext = cache(async (): Promise<PageContext | null> => {
  const signed = await currentlySigned()
  if (!signed) return null
  const context = contextOf(signed)
  const buildings = await context.read(listBuildingsInScope)
  const chosen = (await cookies()).get(BUILDING_COOKIE)?.value
  const building = buildings.find(({ slug }) => slug === chosen) ?? buildings[0] ?? null
  return { ...context, buildings, building }
})
