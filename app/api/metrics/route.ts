import { env, publicUrl } from '@/lib/server/env'
import { route } from '@/lib/server/http/route'
import { admitToMetrics } from '@/lib/server/metrics/access'
import { metricsText } from '@/lib/server/metrics/metrics'

export const dynamic = 'force-dynamic'

/** GET /api/metrics: figures of the deployment for Prometheus; for this machine, or with EBBMARK_METRICS_TOKEN. */
export const GET = route({
  permission: 'open',
  handler: async ({ request }) => {
    admitToMetrics(request.headers.get('authorization'), {
      token: env().EBBMARK_METRICS_TOKEN,
      host: env().HOST,
      publicUrl: publicUrl(),
    })
    const { text, contentType } = await metricsText()
    return new Response(text, { headers: { 'Content-Type': contentType, 'Cache-Control': 'no-store' } })
  },
})
