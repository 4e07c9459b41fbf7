import { useQueryClient } from '@tanstack/vue-query'
import { computed, reactive, ref, toRaw, watch, type ComputedRef } from 'vue'
import { z } from 'zod'
import { call } from '@/api/call.ts'
import { forgetFormDraft, keepFormDraft, readFormDraft } from '@/api/form-drafts.ts'
import { pairings, studies } from '@/api/things.ts'
import { useSessionStore } from '@/stores/session.ts'
import { useLotOptions, usePrinterOptions, useResinOptions } from './useOptions.ts'
import { useSubmit } from './useSubmit.ts'

const fieldsSchema = z.object({
  printerId: z.string(),
  resinId: z.string(),
  lotId: z.string(),
  name: z.string(),
  layerHeightMicrometres: z.number().nullable(),
  resinTemperatureCelsius: z.number().nullable(),
  exposureKind: z.enum(['seconds', 'mJ/cm2']),
  notes: z.string(),
})
type Fields = z.infer<typeof fieldsSchema>
const draftSchema = z.object({ fields: fieldsSchema, named: z.boolean() })

const labelOf = (options: readonly { value: string; label: string }[], value: string): string =>
  value === '' ? '' : (options.find(option => option.value === value)?.label ?? '')

/** Opens a study: the pairing is made with it where there is none. */
export function useNewStudy(shopId: ComputedRef<string>, given: { readonly printerId: string; readonly resinId: string }) {
  const queries = useQueryClient()
  // Who comes from another pairing means that one, not what was left half-done.
  const draftOf = { userId: useSessionStore().user?.id ?? '', form: `study:${shopId.value}:new:${given.printerId}:${given.resinId}` }
  const fields = reactive<Fields>({
    printerId: given.printerId, resinId: given.resinId, lotId: '', name: '', layerHeightMicrometres: 50, resinTemperatureCelsius: null, exposureKind: 'seconds', notes: '',
  })
  const { busy, error, submit, errorOf } = useSubmit()
  const missing = ref<Partial<Record<keyof Fields, string>>>({})
  /** A name that says what it is, until the person writes their own. */
  const named = ref(false)
  let idempotencyKeys = { pairing: crypto.randomUUID(), study: crypto.randomUUID() }

  const kept = draftSchema.safeParse(readFormDraft(draftOf))
  if (kept.success) {
    Object.assign(fields, kept.data.fields)
    named.value = kept.data.named
  }

  const printerOptions = usePrinterOptions(shopId, 'Choose a printer')
  const resinOptions = useResinOptions(shopId, 'Choose a resin')
  const lotOptions = useLotOptions(shopId, computed(() => fields.resinId), 'Not said')

  watch(() => fields.resinId, () => {
    fields.lotId = ''
  })
  watch([() => fields.resinId, () => fields.printerId, () => fields.layerHeightMicrometres, resinOptions, printerOptions], () => {
    if (named.value) return
    const resin = labelOf(resinOptions.value, fields.resinId)
    const printer = labelOf(printerOptions.value, fields.printerId)
    if (resin !== '' && printer !== '') fields.name = `${resin} on ${printer} at ${fields.layerHeightMicrometres ?? '?'} µm`.slice(0, 120)
  }, { immediate: true })
  watch([fields, named], () => {
    // Another content is another create: the old key would answer with the old study.
    idempotencyKeys = { pairing: crypto.randomUUID(), study: crypto.randomUUID() }
    keepFormDraft(draftOf, { fields: toRaw(fields), named: named.value })
  })

  /** The id of the opened study; null while something is missing or was refused. */
  async function open(): Promise<string | null> {
    const { printerId, resinId, lotId, layerHeightMicrometres } = fields
    missing.value = {
      ...(printerId === '' ? { printerId: 'Choose a printer.' } : {}),
      ...(resinId === '' ? { resinId: 'Choose a resin.' } : {}),
      ...(layerHeightMicrometres === null ? { layerHeightMicrometres: 'Say the layer height.' } : {}),
      ...(fields.name.trim() === '' ? { name: 'Give it a name.' } : {}),
    }
    if (Object.keys(missing.value).length > 0 || layerHeightMicrometres === null) return null
    const params = { shopId: shopId.value }
    let opened: string | null = null
    await submit(async () => {
      const pairing = await call(pairings.createPairing, { params, body: { printerId, resinId }, idempotencyKey: idempotencyKeys.pairing })
      const study = await call(studies.createStudy, {
        params,
        idempotencyKey: idempotencyKeys.study,
        body: {
          pairingId: pairing.id, lotId: lotId === '' ? null : lotId, name: fields.name, layerHeightMicrometres,
          resinTemperatureCelsius: fields.resinTemperatureCelsius, notes: fields.notes, exposureKind: fields.exposureKind,
        },
      })
      opened = study.id
      forgetFormDraft(draftOf)
      await queries.invalidateQueries()
    })
    return opened
  }

  return { fields, named, busy, error, errorOf: (name: keyof Fields) => missing.value[name] ?? errorOf(name), printerOptions, resinOptions, lotOptions, open }
}
