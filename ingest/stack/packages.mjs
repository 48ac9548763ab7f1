// npm packages from the lock, installed only when node_modules does not match it.
import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import fs from 'node:fs'
import path from 'node:path'

/**
 * Installs the locked packages where they are missing or older than the lock. Output of npm goes to standard error.
 * @param {string} root
 * @returns {Promise<boolean>} true when something was installed
 */
export async function ensurePackages(root) {
  const marker = path.join(root, 'node_modules', '.ebbmark-lock')
  const wanted = createHash('sha256')
    .update(fs.readFileSync(path.join(root, 'package-lock.json')))
    .digest('hex')
  if (fs.existsSync(marker) && fs.readFileSync(marker, 'utf8') === wanted) return false
  await npmCi(root)
  fs.writeFileSync(marker, wanted)
  return true
}

/** @param {string} root */
function npmCi(root) {
  return new Promise((resolve, reject) => {
    // none of the packages needs its install script; without them a fresh machine needs no compiler
    const child = spawn('npm', ['ci', '--ignore-scripts', '--no-audit', '--no-fund', '--loglevel=error'], {
      cwd: root,
      stdio: ['ignore', 2, 2],
      env: { ...process.env, NODE_ENV: '', npm_config_omit: '', npm_config_production: '' },
    })
    child.on('error', reject)
    child.on('close', (code) => {
      if (code === 0) resolve(undefined)
      else
        reject(
          new Error(
            `npm ci ended with ${code}. Is the package registry reachable? What it said is above; run it again by hand with: npm ci`,
          ),
        )
    })
  })
}
