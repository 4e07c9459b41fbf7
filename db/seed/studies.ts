import { defaultFilmSettings, type FilmSettings } from '#shared/contracts/studies.ts'
import type { FilmImportMapping } from '#shared/contracts/film-imports.ts'
import type { Database } from '../client.ts'
import { filmReading, filmReadingRevision, importBatch, study } from '../schema/index.ts'
import { daysFrom, type SeedContext } from './context.ts'
import { demoTruths, inventFilms, oddFilm, type InventedFilm } from './invented-films.ts'
import type { ThingIds } from './things.ts'

type Transaction = Pick<Database, 'insert'>
type NewReading = typeof filmReading.$inferInsert

/** 163 µm as a person types it from a caliper that shows mm. */
const typedMillimetres = (micrometres: number) => (micrometres / 1000).toFixed(3)

function readingsOf(context: SeedContext, studyId: string, films: readonly InventedFilm[], daysAgo: number): NewReading[] {
  return films.map((film, i) => {
    // Two minutes from film to film.
    const at = new Date(daysFrom(context.now, -daysAgo).getTime() + i * 120_000)
    return {
      id: context.newId(), shopId: context.shopId, studyId, exposure: film.exposure, exposureText: String(film.exposure), replicate: film.replicate,
      depthMicrometres: film.depthMicrometres, depthText: typedMillimetres(film.depthMicrometres), state: 'measured' as const,
      enteredByUserId: context.userIds.technician, enteredAt: at, updatedAt: at,
    }
  })
}

function studyOf(context: SeedContext, values: {
  id: string
  pairingId: string
  lotId: string
  name: string
  layerHeightMicrometres: number
  daysAgo: number
  film?: Partial<FilmSettings>
  exposureKind?: 'seconds' | 'mJ/cm2'
  state?: 'open' | 'paused' | 'decided'
  notes?: string
}): typeof study.$inferInsert {
  const { daysAgo, film, ...rest } = values
  return {
    resinTemperatureCelsius: 23, ...rest, shopId: context.shopId, film: { ...defaultFilmSettings, gaugeRepeatabilityMicrometres: 3, ...film },
    readingsRevision: 1, createdAt: daysFrom(context.now, -daysAgo - 1), updatedAt: daysFrom(context.now, -daysAgo),
  }
}

/** The import that brought the south bench's films, as the shop's records would show it. */
const southMapping: FilmImportMapping = {
  encoding: 'utf-8', delimiter: ';', decimalMark: ',', headerRows: 1, exposure: { column: 0, unit: 's' }, depth: { column: 1, unit: 'mm' },
  state: null, uncertainty: null, replicate: null, note: null, substrateThicknessMicrometres: 0,
}

/** Film studies in every state that a shop knows: settled, bent, with an odd film, half done, and one resin on two printers. */
export async function seedStudies(transaction: Transaction, context: SeedContext, things: ThingIds): Promise<void> {
  const { shopId, newId, now, userIds } = context
  const ids = { northGrey: newId(), southGrey: newId(), cornerClear: newId(), wideAmber: newId(), southSand: newId() }
  const plan: FilmSettings['plan'] = {
    exposures: [3, 2.4, 7.5, 4.2, 2.4, 12, 3], basis: 'expected-exposure', expectedExposureAtTarget: 3, plannedAt: daysFrom(now, -1).toISOString(),
  }
  await transaction.insert(study).values([
    studyOf(context, {
      id: ids.northGrey, pairingId: things.northGrey, lotId: things.greyLot, name: 'Everyday grey at 50 µm', layerHeightMicrometres: 50, daysAgo: 21, state: 'decided',
      notes: 'Twelve films in one afternoon, glass slips, washed two minutes, not post-cured.',
    }),
    studyOf(context, {
      id: ids.southGrey, pairingId: things.southGrey, lotId: things.greyLot, name: 'Everyday grey on the south bench', layerHeightMicrometres: 50, daysAgo: 14,
      notes: 'Same lot as on the north bench: how much longer does this printer need?',
    }),
    studyOf(context, {
      id: ids.cornerClear, pairingId: things.cornerClear, lotId: things.clearLot, name: 'Window clear, radiant exposure', layerHeightMicrometres: 50, daysAgo: 9, exposureKind: 'mJ/cm2',
      notes: 'Thick films came out thicker than a straight line says.',
    }),
    studyOf(context, {
      id: ids.wideAmber, pairingId: things.wideAmber, lotId: things.amberLot, name: 'Tough amber at 100 µm', layerHeightMicrometres: 100, daysAgo: 5,
      notes: 'One film disagrees with the rest; kept until somebody says why.',
    }),
    studyOf(context, {
      id: ids.southSand, pairingId: things.southSand, lotId: things.sandLot, name: 'Model sand at 25 µm', layerHeightMicrometres: 25, daysAgo: 0,
      film: { plan, overcureMicrometres: 50 }, notes: '',
    }),
  ])

  const batchId = newId()
  await transaction.insert(importBatch).values({
    id: batchId, shopId, studyId: ids.southGrey, fileName: 'south-bench-films.csv', mapping: southMapping, acceptedRows: 12, rejectedRows: 1,
    rejected: [{ line: 8, cells: ['3,9', 'torn'], reasons: ['Thickness: the cell is “torn”, which is not a number.'] }], header: ['time (s)', 'thickness (mm)'],
    importedByUserId: userIds.engineer, importedAt: daysFrom(now, -14),
  })

  const north = readingsOf(context, ids.northGrey, inventFilms(demoTruths.northGrey), 21)
  const south = readingsOf(context, ids.southGrey, inventFilms(demoTruths.southGrey), 14).map(reading => ({
    ...reading, importBatchId: batchId, enteredByUserId: userIds.engineer, enteredAt: daysFrom(now, -14), updatedAt: daysFrom(now, -14),
    exposureText: `${reading.exposureText.replace('.', ',')} s`, depthText: `${reading.depthText.replace('.', ',')} mm`,
  }))
  const amberFilms = inventFilms(demoTruths.wideAmber).map(film =>
    film.exposure === oddFilm.exposure && film.replicate === oddFilm.replicate ? { ...film, depthMicrometres: film.depthMicrometres + oddFilm.addedMicrometres } : film)
  const amber: NewReading[] = [
    ...readingsOf(context, ids.wideAmber, amberFilms, 5),
    { ...lost(context, ids.wideAmber, 3.9, 3, 5), state: 'lost-in-wash', note: 'Went down the wash; thin as it was.' },
    { ...lost(context, ids.wideAmber, 2.4, 1, 5), state: 'no-film', note: 'Nothing on the glass.' },
  ]
  await transaction.insert(filmReading).values([
    ...north, ...south, ...readingsOf(context, ids.cornerClear, inventFilms(demoTruths.cornerClear), 9), ...amber,
    ...readingsOf(context, ids.southSand, inventFilms(demoTruths.southSand), 0.1),
  ].map(reading => (reading === north[4] ? { ...reading, version: 2, updatedAt: daysFrom(now, -20.9) } : reading)))

  // A slip of two digits that the technician saw the same hour.
  const corrected = north[4]
  if (corrected !== undefined) {
    const swapped = (corrected.depthMicrometres ?? 0) + 90
    await transaction.insert(filmReadingRevision).values({
      readingId: corrected.id, version: 1, shopId, changedByUserId: userIds.technician, changedAt: daysFrom(now, -20.9),
      before: {
        exposure: corrected.exposure, exposureText: corrected.exposureText, replicate: corrected.replicate, depthMicrometres: swapped, depthText: typedMillimetres(swapped),
        standardUncertaintyMicrometres: null, state: 'measured', exclusionReason: null, note: '', withdrawn: false,
      },
    })
  }
}

function lost(context: SeedContext, studyId: string, exposure: number, replicate: number, daysAgo: number) {
  const at = daysFrom(context.now, -daysAgo)
  return {
    id: context.newId(), shopId: context.shopId, studyId, exposure, exposureText: String(exposure), replicate, depthMicrometres: null, depthText: '',
    enteredByUserId: context.userIds.technician, enteredAt: at, updatedAt: at,
  }
}
