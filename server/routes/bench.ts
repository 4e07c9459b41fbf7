import { getBench } from '#shared/contracts/bench.ts'
import { benchOf } from '../services/bench.ts'
import type { Binder } from './binder.ts'

export function benchRoutes(binder: Binder): void {
  binder.implementInShop(getBench, ({ actor }) => benchOf(binder.dependencies, actor))
}
