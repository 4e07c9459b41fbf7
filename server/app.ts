import { randomUUID } from 'node:crypto'
import compression from 'compression'
import express, { type Express } from 'express'
import helmet from 'helmet'
import { pinoHttp } from 'pino-http'
import type { Dependencies } from './dependencies.ts'
import { AppError } from './errors.ts'
import { clientPages } from './middleware/client-pages.ts'
import { csrfProtection } from './middleware/csrf.ts'
import { errorHandler } from './middleware/errors.ts'
import { sessionMiddleware } from './middleware/session.ts'
import { bindRoutes } from './routes/index.ts'

/** Largest JSON body: 2000 cells of the entry grid take about 1 MB. */
const jsonBytesMax = 2_000_000

/** The whole HTTP application, without listening: tests and `main.ts` hand in what it needs. */
export function createApp(dependencies: Dependencies): Express {
  const { config, logger, pool } = dependencies
  const app = express()
  app.disable('x-powered-by')
  app.set('trust proxy', config.trustedProxies)
  app.set('query parser', 'simple')
  app.use(pinoHttp({
    logger,
    genReqId: () => randomUUID(),
    autoLogging: { ignore: request => request.url === '/api/health' },
    // Query strings and headers may hold what people typed or who they are.
    serializers: { req: request => ({ id: request.id, method: request.method, url: String(request.url).split('?')[0] }), res: response => ({ statusCode: response.statusCode }) },
    customLogLevel: (_request, response, error) => (error !== undefined || response.statusCode >= 500 ? 'error' : 'debug'),
  }))
  app.use(helmet({
    contentSecurityPolicy: {
      directives: {
        defaultSrc: ["'self'"],
        scriptSrc: ["'self'"],
        // The component library and the charts set style attributes and style elements from script.
        styleSrc: ["'self'", "'unsafe-inline'"],
        imgSrc: ["'self'", 'data:', 'blob:'],
        fontSrc: ["'self'"],
        connectSrc: ["'self'"],
        workerSrc: ["'self'", 'blob:'],
        frameAncestors: ["'none'"],
        formAction: ["'self'"],
        objectSrc: ["'none'"],
        upgradeInsecureRequests: config.production ? [] : null,
      },
    },
    strictTransportSecurity: config.production,
  }))
  app.use(compression())

  const api = express.Router({ caseSensitive: true })
  api.use(sessionMiddleware(config, pool))
  api.use(csrfProtection(config))
  api.use(express.json({ limit: jsonBytesMax, strict: true, type: 'application/json' }))
  api.use((_request, response, next) => {
    response.setHeader('Cache-Control', 'no-store')
    next()
  })
  bindRoutes(api, dependencies)
  app.get('/api/health', async (_request, response) => {
    await pool.query('select 1')
    response.json({ ok: true })
  })
  app.use((request, response, next) => (request.path.startsWith('/api/') ? api(request, response, next) : next()))
  app.use('/api', () => {
    throw new AppError('not-found', { detail: 'The API has no such address.' })
  })
  if (config.clientFolder !== null) app.use(clientPages(config.clientFolder))
  app.use(() => {
    throw new AppError('not-found', { detail: 'There is no such page.' })
  })
  app.use(errorHandler(logger))
  return app
}
