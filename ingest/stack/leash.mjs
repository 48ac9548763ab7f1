// Loaded before every child's own code: when the starting process is gone (also by kill -9), its channel closes and the child ends.
// A child's own children inherit the option but not the leash: their channels belong to who forked them.
if (process.connected && process.env.EBBMARK_LEASH === String(process.ppid)) {
  process.on('disconnect', () => {
    process.kill(process.pid, 'SIGTERM')
    setTimeout(() => process.exit(1), 5000)
  })
  process.channel?.unref?.()
}
