// npm run db:migrate and db:seed: on DATABASE_URL, or on the PostgreSQL of this checkout.
import { runChild, runScript } from './lib/closing.mjs'
import { checkNode, installPackages } from './lib/install.mjs'
import { openDatabase, takeDataFolder } from './lib/own-folder.mjs'
import { root } from './lib/places.mjs'
import { say } from './lib/say.mjs'

runScript(async () => {
  const task = process.argv[2]
  if (task !== 'migrate' && task !== 'seed') throw new Error('Say what to do: node scripts/database.mjs migrate|seed')
  checkNode()
  await installPackages()
  const given = process.env.DATABASE_URL
  // With our own PostgreSQL never beside a server that runs on it: it migrates and seeds at its start itself.
  const url = given !== undefined && given !== '' ? given : await openDatabase(await takeDataFolder())
  const { status } = await runChild(process.execPath, ['--import', 'tsx', `db/tasks/${task}.ts`], { cwd: root, show: true, env: { ...process.env, DATABASE_URL: url } })
  if (status === 0) say(task === 'migrate' ? 'The database is up to date.' : 'The demo shop is there.')
  return status
})
