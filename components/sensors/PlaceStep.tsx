'use client'

import { Field, RadioRow, Select } from '@/components/ui/Field'
import type { SensorFormHandle } from './RegisterSensor'

export type Place = { id: string; number: string; name: string; kind: string; floor: string }

const airs = [
  { value: 'room', words: 'Room', aside: 'where people breathe' },
  { value: 'exhaust', words: 'Exhaust', aside: 'in the return grille; gives the room mean age' },
  { value: 'supply', words: 'Supply', aside: 'the air that is blown in' },
  { value: 'outdoor', words: 'Outdoor', aside: 'the background of every decay' },
  { value: 'corridor', words: 'Corridor', aside: 'air that reaches rooms through doors' },
] as const

/** Where it hangs and what air it reads. */
export function PlaceStep({
  form,
  places,
  locked,
}: {
  form: SensorFormHandle
  places: readonly Place[]
  locked: boolean
}) {
  const { register, formState, watch } = form
  const { errors } = formState
  const position = watch('position')
  return (
    <fieldset disabled={locked} className="disabled:opacity-70">
      <legend className="sr-only">Place the sensor</legend>
      <fieldset>
        <legend className="mb-[5px] text-2 font-[600]">What air does it read?</legend>
        {airs.map((air) => (
          <RadioRow
            key={air.value}
            value={air.value}
            words={air.words}
            aside={air.aside}
            {...register('position')}
          />
        ))}
      </fieldset>
      {position !== 'outdoor' && (
        <Select label="Room" error={errors.roomId?.message} {...register('roomId')}>
          <option value="">Choose a room</option>
          {[...new Set(places.map((place) => place.floor))].map((floor) => (
            <optgroup key={floor} label={floor}>
              {places
                .filter((place) => place.floor === floor)
                .map((place) => (
                  <option key={place.id} value={place.id}>
                    {place.number} {place.name}
                  </option>
                ))}
            </optgroup>
          ))}
        </Select>
      )}
      <Field
        label="Where exactly"
        placeholder="wall, by the door"
        error={errors.label?.message}
        {...register('label')}
      />
      {position === 'room' && (
        <>
          <label className="mt-4 flex items-start gap-[10px] text-[15px]">
            <input type="checkbox" className="mt-[3px] size-4 accent-(--tide)" {...register('lead')} />
            <span>
              Leads the room{' '}
              <span className="text-2 text-ink-3">
                its reading is the room’s live number; an earlier lead stays, but follows
              </span>
            </span>
          </label>
          <p className="mt-3 text-2 text-ink-3">
            Hang it 1.0 to 1.7 m high, 1 m from door, window and supply opening, and half a metre or more from
            where people sit.
          </p>
        </>
      )}
    </fieldset>
  )
}
