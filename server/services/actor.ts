import type { Role } from '#shared/contracts/common.ts'

/** Who calls: services get this and never the request. */
export interface Actor {
  readonly userId: string
  readonly displayName: string
  readonly email: string
  /** The shop of the address and the caller's role in it; null outside a shop. */
  readonly shopId: string | null
  readonly role: Role | null
}

/** An actor inside a shop: what shop routes get. */
export interface ShopActor extends Actor {
  readonly shopId: string
  readonly role: Role
}
