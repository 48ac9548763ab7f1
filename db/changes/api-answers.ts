import type pg from 'pg'

type Request = { apiKeyId: number; idempotencyKey: string; bodySha256: string; now: Date; keptMs: number }

/** What became of a claim: the request is ours to answer, was answered before, or the key was used for another body. */
export type Claim = { kind: 'ours' } | { kind: 'answered'; answer: unknown } | { kind: 'other-body' }

/**
 * Takes an idempotency key for this request in the running transaction. A second request with the same key waits until the first has
 * committed, and is then given its answer.
 */
export async function claimIdempotencyKey(client: pg.ClientBase, request: Request): Promise<Claim> {
  const { apiKeyId, idempotencyKey, bodySha256, now, keptMs } = request
  await client.query('DELETE FROM api_answers WHERE api_key_id = $1 AND idempotency_key = $2 AND at < $3', [
    apiKeyId,
    idempotencyKey,
    new Date(now.getTime() - keptMs),
  ])
  const claimed = await client.query(
    `INSERT INTO api_answers (api_key_id, idempotency_key, body_sha256, answer, at) VALUES ($1, $2, $3, 'null', $4)
     ON CONFLICT DO NOTHING`,
    [apiKeyId, idempotencyKey, bodySha256, now],
  )
  if (claimed.rowCount === 1) return { kind: 'ours' }
  const found = await client.query<{ body_sha256: string; answer: unknown }>(
    'SELECT body_sha256, answer FROM api_answers WHERE api_key_id = $1 AND idempotency_key = $2',
    [apiKeyId, idempotencyKey],
  )
  const earlier = found.rows[0]
  return earlier?.body_sha256 === bodySha256
    ? { kind: 'answered', answer: earlier.answer }
    : { kind: 'other-body' }
}

/** Keeps the answer beside the claimed key, in the transaction that stored what it tells of. */
export async function keepAnswer(
  client: pg.ClientBase,
  request: Pick<Request, 'apiKeyId' | 'idempotencyKey'>,
  answer: unknown,
): Promise<void> {
  await client.query('UPDATE api_answers SET answer = $3 WHERE api_key_id = $1 AND idempotency_key = $2', [
    request.apiKeyId,
    request.idempotencyKey,
    JSON.stringify(answer),
  ])
}
