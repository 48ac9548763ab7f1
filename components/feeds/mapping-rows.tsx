import type { ReactNode } from 'react'
import { FEED_QUANTITIES, type FeedMapping, type FeedQuantity } from '@/lib/wire/feed'

const names: Record<FeedQuantity, string> = {
  co2: 'CO2',
  temp: 'Temperature',
  rh: 'Relative humidity',
  battery: 'Battery',
  rssi: 'Signal',
}
const code = (text: string) => <span className="fig text-2 break-all">{text}</span>

/** What a mapping says, as pairs. */
export function mappingRows(mapping: FeedMapping): { key: string; name: ReactNode; value: ReactNode }[] {
  const { device, time, items } = mapping
  return [
    ...(items === null ? [] : [{ key: 'items', name: 'List', value: code(items) }]),
    {
      key: 'device',
      name: 'Device id',
      value: 'topicLevel' in device ? `level ${device.topicLevel} of the topic` : code(device.pointer),
    },
    { key: 'time', name: 'Time', value: time === null ? 'of arrival' : code(time.pointer) },
    ...FEED_QUANTITIES.flatMap((quantity) => {
      const from = mapping[quantity]
      if (!from) return []
      const factor = from.scale === 1 ? '' : ` × ${from.scale}`
      const value = (
        <>
          {code(from.pointer)} {from.unit}
          {factor}
        </>
      )
      return [{ key: quantity, name: names[quantity], value }]
    }),
  ]
}
