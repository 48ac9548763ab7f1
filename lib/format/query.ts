/** An address with some of its query changed; undefined removes one, and a default need not be written. */
export function withQuery(
  path: string,
  current: Record<string, string | undefined>,
  change: Record<string, string | undefined>,
): string {
  const query = new URLSearchParams()
  for (const [name, value] of Object.entries({ ...current, ...change }))
    if (value !== undefined && value !== '') query.set(name, value)
  const text = query.toString()
  return text ? `${path}?${text}` : path
}
