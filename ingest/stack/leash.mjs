// Loaded before every child's own code: when the starting process is gone (also by kill -9), its channel closes and the child ends.
if (process.connected) {
  process.on('disconnect', () => {
    process.kill(process.pid, 'SIGTERM')
    setTimeout(() => process.exit(1), 5000)
  })
  process.channel?.unref?.()
}
