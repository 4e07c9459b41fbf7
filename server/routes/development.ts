import { listCaughtMail } from '#shared/contracts/development.ts'
import type { Binder } from './binder.ts'

export function developmentRoutes(binder: Binder): void {
  const { mailbox } = binder.dependencies
  binder.implement(listCaughtMail, async () => ({ items: mailbox === null ? [] : [...(await mailbox.list())] }))
}
