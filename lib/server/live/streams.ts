const holder = globalThis as unknown as { ebbmarkStreams?: Set<() => void> }

/** One set a process, also across the web server's separate bundles. */
function open(): Set<() => void> {
  holder.ebbmarkStreams ??= new Set()
  return holder.ebbmarkStreams
}

/**
 * Registers how an open event stream is closed, so that the web server can end: a stream left open holds its shutdown.
 * Returns what takes the stream off the list, to be called when it closes by itself.
 */
export function registerStream(close: () => void): () => void {
  open().add(close)
  return () => open().delete(close)
}

/** Closes every open stream; one that fails does not keep the others open. */
export function closeAllStreams(): void {
  for (const close of [...open()]) {
    try {
      close()
    } catch {
      // already gone
    }
    open().delete(close)
  }
}

/** How many streams are open. */
export function openStreamCount(): number {
  return open().size
}
