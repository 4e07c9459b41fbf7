import { spawn, type ChildProcess } from 'node:child_process'
import { mkdirSync } from 'node:fs'
import { createInterface } from 'node:readline'
import { AxeBuilder } from '@axe-core/playwright'
import { chromium, type Browser, type BrowserContext, type Page } from 'playwright-core'
import { afterEach, expect } from 'vitest'
import { z } from 'zod'
import { createTestDatabase, type TestDatabase } from '#tests/helpers/test-database.ts'

const chromiumArguments = [
  '--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking', '--disable-component-update', '--disable-sync',
]
const artifacts = '.artifacts/browser'

export type Theme = 'daylight' | 'safelight'

export interface Demo {
  readonly email: string
  readonly password: string
  readonly role: string
}

/** The real server with the built client on a database of its own, and a browser. */
export interface Stage {
  readonly url: string
  readonly demo: readonly Demo[]
  readonly browser: Browser
  readonly database: TestDatabase
  /** A browser of its own: cookies, storage and theme are nobody else's. */
  open(options?: { theme?: Theme; width?: number; height?: number }): Promise<Visitor>
  close(): Promise<void>
}

export interface Visitor {
  readonly page: Page
  readonly context: BrowserContext
  /** What the page complained about: console errors and uncaught ones. */
  readonly complaints: string[]
  goto(path: string): Promise<void>
  signInAs(role: string): Promise<string>
  close(): Promise<void>
}

function startServer(databaseUrl: string): Promise<{ child: ChildProcess; url: string; demo: Demo[] }> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'server/main.ts'], {
    env: { ...process.env, DATABASE_URL: databaseUrl, PORT: '0', CLIENT_FOLDER: `${process.cwd()}/dist`, RATE_LIMIT_FACTOR: '1000', LOG_LEVEL: 'error', FANLIGHT_ENDS_WITH_INPUT: 'yes', SMTP_URL: '', PUBLIC_URL: '' },
    stdio: ['pipe', 'pipe', 'inherit'],
  })
  return new Promise((resolve, reject) => {
    createInterface({ input: child.stdout }).on('line', line => {
      if (!line.startsWith('FANLIGHT_READY ')) return
      const ready: unknown = JSON.parse(line.slice('FANLIGHT_READY '.length))
      if (typeof ready === 'object' && ready !== null && 'url' in ready && 'demo' in ready && Array.isArray(ready.demo)) resolve({ child, url: String(ready.url), demo: ready.demo })
    })
    child.once('exit', code => reject(new Error(`the server ended with ${code}`)))
  })
}

const stages = new Set<Browser>()

// What a failing test had on its screens.
afterEach(async ({ task }) => {
  if (task.result?.state !== 'fail') return
  const pages = [...stages].flatMap(browser => browser.contexts()).flatMap(context => context.pages())
  for (const [i, page] of pages.entries()) {
    const path = `${artifacts}/failed-${task.name.replace(/\W+/g, '-').slice(0, 80)}-${i + 1}.png`
    await page.screenshot({ path, fullPage: true, timeout: 5000 }).catch(() => undefined)
  }
})

export async function openStage(): Promise<Stage> {
  mkdirSync(artifacts, { recursive: true })
  const database = await createTestDatabase()
  const server = await startServer(database.url)
  const browser = await chromium.launch({ executablePath: process.env.CHROMIUM_PATH || '/usr/bin/chromium', args: chromiumArguments })
  stages.add(browser)
  return {
    url: server.url, demo: server.demo, browser, database,
    async open({ theme = 'daylight', width = 1280, height = 900 } = {}) {
      const context = await browser.newContext({ viewport: { width, height }, baseURL: server.url, acceptDownloads: true })
      await context.addInitScript(name => {
        if (localStorage.getItem('fanlight.theme') === null) localStorage.setItem('fanlight.theme', name)
      }, theme)
      const page = await context.newPage()
      page.setDefaultTimeout(20_000)
      const complaints: string[] = []
      page.on('console', message => {
        if (message.type() === 'error') complaints.push(message.text())
      })
      page.on('pageerror', error => complaints.push(error.message))
      return {
        page, context, complaints,
        async goto(path) {
          await page.goto(path)
          await page.getByRole('heading', { level: 1 }).first().waitFor()
        },
        async signInAs(role) {
          const person = server.demo.find(item => item.role === role)
          await page.goto('/sign-in')
          await page.getByLabel('E-mail').fill(person?.email ?? '')
          await page.getByLabel('Password').fill(person?.password ?? '')
          await page.getByRole('button', { name: 'Sign in', exact: true }).click()
          await page.waitForURL(/\/bench$/)
          await page.getByRole('heading', { level: 1, name: 'Bench' }).waitFor()
          return /\/shop\/([^/]+)/.exec(page.url())?.[1] ?? ''
        },
        close: () => context.close(),
      }
    },
    async close() {
      stages.delete(browser)
      await browser.close()
      server.child.removeAllListeners('exit')
      const ended = new Promise(resolve => server.child.once('exit', resolve))
      server.child.kill('SIGTERM')
      await ended
      await database.drop()
    },
  }
}

/** Axe at WCAG 2.2 AA: no violation at all, each told with the element that has it. */
export async function expectAccessible(page: Page, name: string): Promise<void> {
  const { violations } = await new AxeBuilder({ page }).options({ resultTypes: ['violations'] }).withTags(['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa']).analyze()
  const told = violations.flatMap(violation => violation.nodes.map(node => `${violation.id}: ${node.target.join(' ')} ${node.failureSummary ?? ''}`))
  if (told.length > 0) await page.screenshot({ path: `${artifacts}/${name.replace(/\W+/g, '-')}.png`, fullPage: true })
  expect(told, name).toEqual([])
}

/** The page itself never scrolls sideways; wide tables scroll in their own box. */
export async function expectNoSidewaysScroll(page: Page, name: string): Promise<void> {
  const overflow = await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth)
  expect(overflow, `${name} is wider than the window by`).toBeLessThanOrEqual(0)
}

/** The newest caught mail to an address, as a person would open it. */
export async function linkFromMail(visitor: Visitor, to: string): Promise<string> {
  for (let attempt = 0; attempt < 40; attempt++) {
    const answer = await visitor.context.request.get('/api/development/mails')
    const body: unknown = await answer.json()
    const items = typeof body === 'object' && body !== null && 'items' in body && Array.isArray(body.items) ? body.items : []
    const mail: unknown = items.find((item: unknown) => typeof item === 'object' && item !== null && 'to' in item && Array.isArray(item.to) && item.to.includes(to))
    if (typeof mail === 'object' && mail !== null && 'links' in mail && Array.isArray(mail.links)) return String(mail.links[0]).replace(/^https?:\/\/[^/]+/, '')
    await new Promise(resolve => setTimeout(resolve, 250))
  }
  throw new Error(`no mail to ${to} was caught`)
}

const traceSchema = z.object({
  traceEvents: z.array(z.object({ name: z.string(), ph: z.string(), pid: z.number(), tid: z.number(), dur: z.number().optional(), tdur: z.number().optional(), args: z.unknown() })),
})

/**
 * The longest task of the page's main thread while `work` goes on: in time of the processor, which does not grow when other
 * programs keep the machine busy, and as the clock on the wall had it.
 */
export async function longestTask(stage: Stage, page: Page, work: () => Promise<void>): Promise<{ cpuMilliseconds: number; wallMilliseconds: number }> {
  await stage.browser.startTracing(page, { categories: ['disabled-by-default-devtools.timeline', 'toplevel', '__metadata'] })
  await work()
  const { traceEvents } = traceSchema.parse(JSON.parse((await stage.browser.stopTracing()).toString()))
  const mainThreads = new Set(traceEvents.filter(event => event.name === 'thread_name' && JSON.stringify(event.args).includes('CrRendererMain')).map(({ pid, tid }) => `${pid}/${tid}`))
  const tasks = traceEvents.filter(event => event.ph === 'X' && event.name.endsWith('RunTask') && mainThreads.has(`${event.pid}/${event.tid}`))
  if (tasks.length < 10) throw new Error(`the trace holds ${tasks.length} tasks of a page's main thread`)
  const longest = (times: readonly (number | undefined)[]) => times.reduce<number>((most, time) => Math.max(most, time ?? 0), 0) / 1000
  return { cpuMilliseconds: longest(tasks.map(({ tdur }) => tdur)), wallMilliseconds: longest(tasks.map(({ dur }) => dur)) }
}
