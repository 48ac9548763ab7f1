import type { Database } from '@/db/client'
import { newPublicId } from '@/db/public-id'
import * as schema from '@/db/schema'
import type { DigestContent } from '@/lib/wire/digests'
import type { SmallOrganization } from './small-building'

export type SmallResults = { decayPublicId: string; digestPublicId: string }

/** One accepted decay of the hall and one digest of the tenancy that holds it, as the nightly job and the digest job would store them. */
export async function addSmallResults(
  database: Database,
  { organizationId, buildingId, rooms, tenancies }: SmallOrganization,
): Promise<SmallResults> {
  const place = { organizationId, buildingId }
  const results = { decayPublicId: newPublicId(), digestPublicId: newPublicId() }
  await database.asSystem('test: small results', async (tx) => {
    await tx.insert(schema.decays).values({
      ...place,
      publicId: results.decayPublicId,
      roomId: rooms.hall.id,
      sensorId: rooms.hall.sensorId,
      lead: true,
      night: '2026-05-12',
      startAt: new Date('2026-05-12T17:30:00Z'),
      endAt: new Date('2026-05-12T19:10:00Z'),
      kind: 'fit',
      airChangeRatePerHour: 2.4,
      airChangeRateLowPerHour: 2.2,
      airChangeRateHighPerHour: 2.6,
      backgroundPpm: 430,
      backgroundUncertaintyPpm: 12,
      backgroundOrigin: 'outdoor sensor',
      startPpm: 1120,
      endPpm: 470,
      meanAgeMin: 25,
      mode: 'supply on',
      modeFrom: 'schedule',
      quality: 'accepted',
      reasons: [],
      points: 100,
      checks: [],
      sentence: 'Air-change rate 2.4 per hour (2.2 to 2.6), 18:30 to 20:10, supply on.',
      methodVersion: 'test',
      inputHash: 'test',
      provisional: false,
    })
    await tx.insert(schema.digests).values({
      ...place,
      publicId: results.digestPublicId,
      tenancyId: tenancies.weir.id,
      weekStart: '2026-05-04',
      content: smallLetter(rooms.hall.publicId),
    })
  })
  return results
}

function smallLetter(roomId: string): DigestContent {
  return {
    version: 1,
    building: { name: 'mill works', timeZone: 'Europe/Lisbon' },
    tenancy: { name: 'Weir' },
    weekStart: '2026-05-04',
    weekEnd: '2026-05-10',
    weekWords: '4 to 10 May',
    title: 'Your room had enough outdoor air.',
    lead: ['The hall had what was agreed.'],
    rooms: [
      {
        roomId,
        number: '0.01',
        name: 'Hall',
        use: 'office',
        standing: 'enough',
        reason: null,
        supportsPersons: 8,
        plannedFor: 8,
        basisName: 'EN 16798-1 category II',
        days: [],
        overMinutes: 0,
        occupiedMinutes: 2400,
        heardMinutes: 2400,
        overWords: 'never over the limit',
        clearsInMinutes: 40,
      },
    ],
    beingDone: [],
    goodToKnow: null,
    occupancyCaution:
      'For ventilation only. Fire-safety and licensed occupancy limits may be lower and take precedence.',
    cautions: [],
  }
}
