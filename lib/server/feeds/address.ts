import type { FeedSource } from '@/db/queries/feeds'
import { type BrokerAddress, parseBrokerUrl } from '../mqtt/address'
import { secretKey, unseal } from '../seal'

/** What a feed's password is sealed for: it opens in no other feed's row. */
export function sealPurpose(publicId: string): string {
  return `feed ${publicId}`
}

/** Where a feed's broker is, with its password opened; throws where the key is another. */
export function feedAddress(
  feed: Pick<FeedSource, 'publicId' | 'brokerUrl' | 'userName' | 'passwordSealed' | 'caPem'>,
): BrokerAddress {
  const address = parseBrokerUrl(feed.brokerUrl, feed.caPem ?? undefined)
  const password =
    feed.passwordSealed === null
      ? undefined
      : unseal(feed.passwordSealed, sealPurpose(feed.publicId), secretKey())
  return { ...address, userName: feed.userName ?? undefined, password }
}
