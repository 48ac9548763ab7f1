import type { Instrumentation } from 'next'

/** Runs once when the web server starts, before the first request. */
export async function register(): Promise<void> {
  // biome-ignore lint/style/noProcessEnv: the build replaces it; it keeps Node's parts out of any other bundle
  if (process.env.NEXT_RUNTIME !== 'nodejs') return
  const { startWebProcess } = await import('@/lib/server/web-process')
  startWebProcess()
}

/** An error that nothing caught while a page, handler or action was answered. */
export const onRequestError: Instrumentation.onRequestError = async (error, request, context) => {
  // biome-ignore lint/style/noProcessEnv: as above
  if (process.env.NEXT_RUNTIME !== 'nodejs') return
  const { log } = await import('@/lib/server/log')
  const { method, path } = request
  log().error({ err: error, method, path, route: context.routePath }, 'a request failed')
}
