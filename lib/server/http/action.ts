import { unstable_rethrow } from 'next/navigation'
import type { z } from 'zod'
import { type FieldProblems, type ProblemKind, Refusal } from '@/lib/errors'
import { can, type Permission, type PermissionOrOpen, whoMay } from '@/lib/policy/permissions'
import { asRefusal } from './problem'
import { contextOf, currentlySigned, type SignedContext } from './signed'

/** What an action gives back to the screen: its value, or words for the form and for each field. */
export type ActionResult<T> =
  | { ok: true; value: T }
  | { ok: false; kind: ProblemKind; title: string; detail: string; fields?: FieldProblems }

export type ActionSpec<Permitted extends PermissionOrOpen, S extends z.ZodType, T> = {
  /** Required: what the caller must hold; 'open' where nobody needs to be signed in. */
  permission: Permitted
  /** The form's schema of lib/forms; a FormData is first made an object (a repeated name becomes an array). */
  schema: S
  run: (ctx: Permitted extends Permission ? SignedContext : null, input: z.output<S>) => Promise<T>
}

/** Called with the input, or by useActionState with the earlier result and the form's data. */
export type Action<T> = (inputOrEarlier: unknown, formData?: FormData) => Promise<ActionResult<T>>

/**
 * A server action that cannot be written without naming its permission. Asks for the person first, then parses the input, then runs;
 * refusals come back as words, never as a thrown error. Next accepts actions by POST from the same origin alone.
 */
export function action<const Permitted extends PermissionOrOpen, S extends z.ZodType, T>(
  spec: ActionSpec<Permitted, S, T>,
): Action<T> {
  return async (inputOrEarlier, formData) => {
    try {
      const ctx = (await admit(spec.permission)) as Permitted extends Permission ? SignedContext : null
      const input = spec.schema.parse(plain(formData ?? inputOrEarlier))
      return { ok: true, value: await spec.run(ctx, input) }
    } catch (error) {
      unstable_rethrow(error)
      const refusal = asRefusal(error, `action for ${spec.permission}`)
      return {
        ok: false,
        kind: refusal.kind,
        title: refusal.title,
        detail: refusal.message,
        ...(refusal.fields ? { fields: refusal.fields } : {}),
      }
    }
  }
}

async function admit(permission: PermissionOrOpen): Promise<SignedContext | null> {
  if (permission === 'open') return null
  const signed = await currentlySigned()
  if (!signed)
    throw new Refusal('not-signed-in', 'Your session has ended; nothing was changed. Sign in and try again.')
  if (!can(signed.membership.roles, permission)) {
    throw new Refusal('not-allowed', `This needs ${whoMay(permission)}. Nothing was changed.`)
  }
  return contextOf(signed)
}

function plain(input: unknown): unknown {
  if (!(input instanceof FormData)) return input
  const names = [...new Set(input.keys())].filter((name) => !name.startsWith('$ACTION'))
  return Object.fromEntries(
    names.map((name) => {
      const values = input.getAll(name)
      return [name, values.length > 1 ? values : values[0]]
    }),
  )
}
