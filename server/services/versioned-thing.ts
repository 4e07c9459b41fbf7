import type { ErrorCode } from '#shared/contracts/error.ts'
import type { Dependencies, Executor } from '../dependencies.ts'
import { AppError, notFound, staleEdit } from '../errors.ts'
import { postgresConstraint } from '../middleware/errors.ts'
import { recordAudit } from '../repositories/audit.ts'
import type { ShopActor } from './actor.ts'

interface Thing {
  readonly id: string
  readonly version: number
  readonly retiredAt: string | null
}

interface Key {
  readonly shopId: string
  readonly id: string
}

/** What a violated constraint means to a person. */
export interface ConstraintMeaning {
  readonly code: ErrorCode
  readonly detail: string
  readonly field?: string
}

interface Storage<T extends Thing, New, Change> {
  /** Word for it in sentences and in the audit: "printer". */
  readonly word: string
  readonly read: (database: Executor, key: Key) => Promise<T | null>
  readonly insert: (database: Executor, key: Key, values: New) => Promise<unknown>
  /** False when the version has moved on. */
  readonly change: (database: Executor, key: Key, change: { baseVersion: number; set: Change & { retiredAt?: Date | null } }) => Promise<boolean>
  readonly constraints: Readonly<Record<string, ConstraintMeaning>>
  /** Rules that need the rest of the shop; runs in the transaction of the change. */
  readonly checkNew?: (database: Executor, actor: ShopActor, values: New) => Promise<void>
  readonly checkChange?: (database: Executor, actor: ShopActor, before: T, change: Change) => Promise<void>
}

/**
 * Create, change, retire and restore for the things that people keep: printers, resins, lots, pairings, studies.
 *
 * A change made on a stale copy is refused with the thing as it stands; every change is in the audit with before and
 * after, in its own transaction.
 */
export function versionedThing<T extends Thing, New extends object, Change extends object>(dependencies: Dependencies, storage: Storage<T, New, Change>) {
  const { word } = storage

  async function meaningfully<R>(work: () => Promise<R>): Promise<R> {
    try {
      return await work()
    } catch (error) {
      const meaning = storage.constraints[postgresConstraint(error) ?? '']
      if (meaning === undefined) throw error
      throw new AppError(meaning.code, {
        detail: meaning.detail, cause: error,
        ...(meaning.field === undefined ? {} : { fields: [{ path: `body.${meaning.field}`, sentence: meaning.detail }] }),
      })
    }
  }

  const audit = (database: Executor, actor: ShopActor, entry: { action: string; thingId: string; before?: unknown; after?: unknown }) =>
    recordAudit(database, { id: dependencies.newId(), shopId: actor.shopId, actorUserId: actor.userId, thing: word, ...entry })

  async function change(database: Executor, actor: ShopActor, id: string, edit: { baseVersion: number; set: Change & { retiredAt?: Date | null }; action: string }): Promise<T> {
    const key = { shopId: actor.shopId, id }
    return meaningfully(() => database.transaction(async transaction => {
      const before = await storage.read(transaction, key)
      if (before === null) throw notFound(word)
      if (before.version !== edit.baseVersion) throw staleEdit(word, before)
      // Retired twice, or restored twice: it is so already, and the history tells it once.
      if (edit.set.retiredAt !== undefined && (edit.set.retiredAt === null) === (before.retiredAt === null)) return before
      await storage.checkChange?.(transaction, actor, before, edit.set)
      if (!(await storage.change(transaction, key, edit))) throw staleEdit(word, await storage.read(transaction, key))
      const after = await storage.read(transaction, key)
      if (after === null) throw notFound(word)
      await audit(transaction, actor, { action: edit.action, thingId: id, before, after })
      return after
    }))
  }

  return {
    async get(actor: ShopActor, id: string): Promise<T> {
      const found = await storage.read(dependencies.database, { shopId: actor.shopId, id })
      if (found === null) throw notFound(word)
      return found
    },

    /** In the transaction handed in, or one of its own. */
    async create(database: Executor, actor: ShopActor, values: New): Promise<T> {
      const id = dependencies.newId()
      const key = { shopId: actor.shopId, id }
      return meaningfully(() => database.transaction(async transaction => {
        await storage.checkNew?.(transaction, actor, values)
        await storage.insert(transaction, key, values)
        const made = await storage.read(transaction, key)
        if (made === null) throw new Error(`a ${word} was made but cannot be read`)
        await audit(transaction, actor, { action: 'created', thingId: id, after: made })
        return made
      }))
    },

    update: (actor: ShopActor, id: string, edit: { baseVersion: number; set: Change }): Promise<T> => change(dependencies.database, actor, id, { ...edit, action: 'changed' }),

    retire: (actor: ShopActor, id: string, baseVersion: number): Promise<T> =>
      change(dependencies.database, actor, id, { baseVersion, set: { retiredAt: dependencies.clock() } as Change & { retiredAt: Date }, action: 'retired' }),

    /** In the transaction handed in, or one of its own. */
    restore: (actor: ShopActor, id: string, baseVersion: number, database: Executor = dependencies.database): Promise<T> =>
      change(database, actor, id, { baseVersion, set: { retiredAt: null } as Change & { retiredAt: null }, action: 'restored' }),
  }
}
