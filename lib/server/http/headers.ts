/** Header in which proxy.ts tells a page its own address; set anew on every request, so a caller's own is never believed. */
export const PATH_HEADER = 'x-ebbmark-path'

/** Cookie that remembers the building someone works on, by slug. */
export const BUILDING_COOKIE = 'ebbmark-building'
