import { spawn, type ChildProcess } from 'node:child_process'
import { createInterface } from 'node:readline'
import { z } from 'zod'

const readySchema = z.object({ url: z.url(), demo: z.array(z.object({ email: z.string(), password: z.string(), role: z.string() })) })

export interface ServerProcess {
  readonly child: ChildProcess
  readonly ready: z.infer<typeof readySchema>
  /** What it wrote to standard error so far. */
  log(): string
  /** Sends a signal and waits for the end; answers the exit code, or the signal that ended it. */
  end(signal: NodeJS.Signals): Promise<number | NodeJS.Signals | null>
}

/**
 * The server as `npm start` runs it, as a process of its own, on a free port.
 *
 * @param onLog - told the whole log so far at each of its lines, also before the server is ready
 */
export async function startServerProcess(environment: Readonly<Record<string, string>>, onLog: (log: string) => void = () => {}): Promise<ServerProcess> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'server/main.ts'], {
    env: {
      PATH: process.env.PATH, NODE_ENV: 'development', PORT: '0', SESSION_SECRET: 'a secret for tests, thirty-two characters long', PUBLIC_URL: 'http://fanlight.test',
      FANLIGHT_ENDS_WITH_INPUT: 'yes', DEMO_SHOP: 'no', RATE_LIMIT_FACTOR: '1000', ...environment,
    },
    stdio: ['pipe', 'pipe', 'pipe'],
  })
  let log = ''
  child.stderr.on('data', (chunk: Buffer) => {
    log += chunk.toString()
    onLog(log)
  })
  const ended = new Promise<number | NodeJS.Signals | null>(resolve => child.once('exit', (code, signal) => resolve(code ?? signal)))
  const ready = await new Promise<z.infer<typeof readySchema>>((resolve, reject) => {
    createInterface({ input: child.stdout }).on('line', line => {
      if (line.startsWith('FANLIGHT_READY ')) resolve(readySchema.parse(JSON.parse(line.slice('FANLIGHT_READY '.length))))
    })
    void ended.then(code => reject(new Error(`the server ended (${code}): ${log}`)))
  })
  return {
    child, ready,
    log: () => log,
    end(signal) {
      child.kill(signal)
      return ended
    },
  }
}

/** A visitor who has the token and the cookie that a write needs. */
export async function arriveAsVisitor(url: string): Promise<(path: string, body: unknown) => Promise<Response>> {
  const session = await fetch(`${url}/api/session`)
  const { csrfToken } = z.object({ csrfToken: z.string() }).parse(await session.json())
  const cookie = session.headers.get('set-cookie')?.split(';')[0] ?? ''
  return (path, body) => fetch(`${url}${path}`, { method: 'POST', headers: { 'Content-Type': 'application/json', 'X-CSRF-Token': csrfToken, Cookie: cookie }, body: JSON.stringify(body) })
}

/** A browser's two steps for one write: token and cookie, then the call. */
export async function postAsVisitor(url: string, path: string, body: unknown): Promise<Response> {
  const post = await arriveAsVisitor(url)
  return post(path, body)
}
