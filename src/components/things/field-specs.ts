import type { FieldSpec } from '@/composables/useThingForm.ts'

export const printerFields: readonly FieldSpec[] = [
  { name: 'name', label: 'Name', kind: 'text', required: true, hint: 'As people call it at the bench.' },
  { name: 'lightEngineWavelengthNanometres', label: 'Light engine wavelength', unit: 'nm', kind: 'number', required: true },
  { name: 'pixelSizeMicrometres', label: 'Pixel size', unit: 'µm', kind: 'number', required: true },
  { name: 'plateWidthMillimetres', label: 'Build plate width', unit: 'mm', kind: 'number', required: true },
  { name: 'plateDepthMillimetres', label: 'Build plate depth', unit: 'mm', kind: 'number', required: true },
  { name: 'exposureStepSeconds', label: 'Exposure step', unit: 's', kind: 'number', required: true, hint: 'The finest change that the printer takes.' },
  { name: 'exposureSecondsMin', label: 'Shortest exposure', unit: 's', kind: 'number', required: true },
  { name: 'exposureSecondsMax', label: 'Longest exposure', unit: 's', kind: 'number', required: true },
  { name: 'irradianceMilliwattsPerSquareCentimetre', label: 'Irradiance', unit: 'mW/cm²', kind: 'number', hint: 'Only where it was metered at the film; otherwise leave it empty.' },
  { name: 'notes', label: 'Notes', kind: 'notes' },
]

/** What a new printer starts from; the rest a person must know. */
export const printerStart = {
  name: '', lightEngineWavelengthNanometres: 405, pixelSizeMicrometres: null, plateWidthMillimetres: null, plateDepthMillimetres: null,
  exposureStepSeconds: 0.1, exposureSecondsMin: 0.5, exposureSecondsMax: 60, irradianceMilliwattsPerSquareCentimetre: null, notes: '',
}

export const resinFields: readonly FieldSpec[] = [
  { name: 'name', label: 'Name', kind: 'text', required: true },
  { name: 'description', label: 'Description', kind: 'text', hint: 'What one sees or must know: grey and filled; clear; castable.' },
  { name: 'notes', label: 'Notes', kind: 'notes' },
]

export const lotFields: readonly FieldSpec[] = [
  { name: 'code', label: 'Lot code', kind: 'text', required: true, hint: 'As printed on the bottle.' },
  { name: 'receivedOn', label: 'Received', kind: 'date', nullable: true },
  { name: 'openedOn', label: 'Opened', kind: 'date', nullable: true },
  { name: 'expiresOn', label: 'Expires', kind: 'date', nullable: true },
  { name: 'notes', label: 'Notes', kind: 'notes' },
]
