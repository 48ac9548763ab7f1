import { z } from 'zod'

/** A building-local date. */
export const dateSchema = z.string().regex(/^\d{4}-\d{2}-\d{2}$/, 'expected a date YYYY-MM-DD')

/** Internal id of a row. */
export const idSchema = z.number().int().positive()
