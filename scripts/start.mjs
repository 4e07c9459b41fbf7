// npm start: installs what is missing, starts PostgreSQL, migrates, seeds, serves client and API on one port.
import { join } from 'node:path'
import { performance } from 'node:perf_hooks'
import { buildClient, clientFolder } from './lib/build-client.mjs'
import { close, closeLater, isClosing, runScript } from './lib/closing.mjs'
import { checkNode, installPackages } from './lib/install.mjs'
import { openDatabase, sessionSecret, takeDataFolder } from './lib/own-folder.mjs'
import { choosePort, isFree } from './lib/ports.mjs'
import { say, step } from './lib/say.mjs'
import { saySignIns, startServer, stopServer } from './lib/server-process.mjs'

const began = performance.now()

/** A port that the person named; 0 and nothing leave the choice to us. */
const isFixed = wanted => wanted !== undefined && wanted !== '' && wanted !== '0'

async function startOnFreePort(own, databaseUrl) {
  const logFile = join(own.folder, 'server-log')
  for (let attempt = 1; ; attempt++) {
    const port = await choosePort(process.env)
    try {
      return await startServer({
        logFile,
        started: own.noteServer,
        environment: {
          DATABASE_URL: databaseUrl,
          PORT: String(port),
          SESSION_SECRET: sessionSecret(own.folder),
          CLIENT_FOLDER: clientFolder,
        },
      })
    } catch (error) {
      // Another checkout that starts at the same moment may have taken the port since.
      if (isClosing() || attempt === 3 || isFixed(process.env.PORT) || await isFree(port, process.env.HOST)) throw error
    }
  }
}

async function main() {
  checkNode()
  const own = await takeDataFolder()
  await installPackages()
  const databaseUrl = await openDatabase(own)
  await buildClient()
  const { child, ready } = await step('starting the server', () => startOnFreePort(own, databaseUrl))
  closeLater(() => stopServer(child))
  child.once('exit', (code, signal) => {
    if (isClosing()) return
    process.stderr.write(`\nThe server ended by itself (${signal ?? `code ${code}`}). Its log: ${join(own.folder, 'server-log')}\n`)
    void close(1)
  })
  own.noteAddress(ready.url)

  say(`\nFanlight is ready after ${((performance.now() - began) / 1000).toFixed(1)} s:  ${ready.url}\n`)
  saySignIns(ready.demo)
  say(`\nData: ${own.folder}\nCtrl-C ends everything.`)
}

runScript(main, { signalIsFine: true })
