/** Imports and exports of CSV: what the browser's worker and the server both need, so that a preview never differs from the import. */

// What kind of file it is
export { detectEncoding, type EncodingOutcome, type TextEncoding } from './detect-encoding.ts'
export { detectDelimiter, type Delimiter } from './detect-delimiter.ts'
export { detectDecimalMark, type DecimalMark } from './detect-decimal-mark.ts'
export { guessHeaderRows } from './guess-header-rows.ts'

// Tokenising
export { createLineEndNormaliser } from './line-ends.ts'
export { createRowSplitter, tokeniserOf, type QuoteState, type SplitterOutcome, type TokenisedRow, type Tokeniser } from './row-splitter.ts'
export { csvTokeniserOptions, rowCharactersMax } from './tokeniser-options.ts'

// What the columns mean
export { guessFilmImportMapping, headerOf, type ExposureKind, type MappingGuess } from './guess-mapping.ts'
export { roleOfHeader, exposureUnitOfHeader, lengthUnitOfHeader, type ColumnRole } from './header-words.ts'
export { headerSignature } from './header-signature.ts'
export { mappingProblem, mappingWidthProblem } from './mapping-problem.ts'

// Rows
export { createFilmRowReader, columnsMax, type FilmRowReader, type ReaderOutcome } from './film-row-reader.ts'
export { readFilmRow, type ImportedReading, type RowOutcome } from './read-film-row.ts'
export { readNumberCell, looksLikeFormula, cellCharactersMax, type NumberCell, type NumberRefusal } from './number-cell.ts'
export { stateOf, type FilmReadingState } from './state-words.ts'
export { exposureUnitOf, lengthUnitOf, unitLabels, type ExposureUnit, type LengthUnit } from './unit-words.ts'
export { shortened } from './shortened.ts'

// Writing
export { toCsv, csvCell, type CsvValue } from './to-csv.ts'
