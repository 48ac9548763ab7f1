/** The weekly digest of one tenancy: what page and mail both show. Rooms, people and minutes; the words of the trade stay out. */
import { z } from 'zod'

const date = z.string().regex(/^\d{4}-\d{2}-\d{2}$/)

/** Whether outdoor air met what was agreed. Only a proven shortfall is called one. */
export const DIGEST_STANDINGS = ['enough', 'enough, just', 'too little', 'not proven yet'] as const
export type DigestStanding = (typeof DIGEST_STANDINGS)[number]

/** One weekday's glass: how full the fullest quarter of an hour was, 0 outdoor air, 1 the limit. Null where nothing was heard. */
export const digestDaySchema = z.object({
  date,
  weekday: z.string(),
  level: z.number().nullable(),
  peakPpm: z.number().nullable(),
  state: z.enum(['in range', 'near the limit', 'over the limit', 'no signal']),
  overMinutes: z.number(),
  /** the same in words, for readers who do not see the glass */
  words: z.string(),
})
export type DigestDay = z.infer<typeof digestDaySchema>

export const digestRoomSchema = z.object({
  roomId: z.string(),
  number: z.string(),
  name: z.string(),
  use: z.string(),
  standing: z.enum(DIGEST_STANDINGS),
  /** why nothing is proven yet, in plain words; null otherwise */
  reason: z.string().nullable(),
  /** people that the room's ventilation supports; never shown without the caution */
  supportsPersons: z.number().int().nullable(),
  plannedFor: z.number().int().nullable(),
  basisName: z.string().nullable(),
  /** Monday to Friday; empty for a room of a single person, of which only weekly figures are shown */
  days: z.array(digestDaySchema),
  /** minutes over the limit in the week's occupied hours, and how many of them were heard */
  overMinutes: z.number(),
  occupiedMinutes: z.number(),
  heardMinutes: z.number(),
  overWords: z.string(),
  /** minutes empty until a room that stood at its limit is fresh again; null where it is not known */
  clearsInMinutes: z.number().int().nullable(),
})
export type DigestRoom = z.infer<typeof digestRoomSchema>

export const digestContentSchema = z.object({
  version: z.literal(1),
  building: z.object({ name: z.string(), timeZone: z.string() }),
  tenancy: z.object({ name: z.string() }),
  weekStart: date,
  weekEnd: date,
  /** e.g. "9 to 15 November" */
  weekWords: z.string(),
  title: z.string(),
  lead: z.array(z.string()),
  rooms: z.array(digestRoomSchema),
  /** what was found about these rooms and who has it */
  beingDone: z.array(z.object({ subject: z.string(), sentence: z.string() })),
  goodToKnow: z.string().nullable(),
  /** shown wherever a number of people is */
  occupancyCaution: z.string(),
  cautions: z.array(z.string()),
})
export type DigestContent = z.infer<typeof digestContentSchema>
