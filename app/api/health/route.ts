import { currentHealth } from '@/lib/server/health'
import { route } from '@/lib/server/http/route'

export const dynamic = 'force-dynamic'

/** 200 when database, broker and last night are well; else 503, and which of them is not. */
export const GET = route({
  permission: 'open',
  handler: async () => {
    const health = await currentHealth()
    return Response.json(health, {
      status: health.well ? 200 : 503,
      headers: { 'Cache-Control': 'no-store' },
    })
  },
})
