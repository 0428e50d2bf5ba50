// What does Wavewell offer to a program that calls it?

// From a device file to a checked device.
export { readDevice, type ReadOptions } from './device/read.ts';
export { DeviceError, formatFinding, listNames, nearestName, showValue, type Finding } from './device/findings.ts';
export { deviceJsonSchema, FORMAT_VERSION } from './device/schema.ts';
export { deviceSize, type DeviceSize } from './device/size.ts';
export { showBytes } from './device/sanity.ts';
export {
  isWalled,
  type Band,
  type BandQuantity,
  type Body,
  type Device,
  type Guide,
  type Knob,
  type LengthUnit,
} from './device/model.ts';
export { GeometryError } from './geometry/geometry-error.ts';
export { areaOf } from './geometry/area.ts';
export { boundingCircle, type Circle } from './geometry/bounding-circle.ts';
export { ENERGY_UNITS, FREQUENCY_UNITS, fromWavenumber, toWavenumber } from './materials/spectral-units.ts';
export { gainReport, pumpOfGain, type GainReport } from './materials/gain.ts';

// The questions.
export {
  DEFAULT_Q_MIN,
  findModes,
  type Assignment,
  type Mode,
  type ModesAnswer,
  type ModesRequest,
  type Progress,
} from './questions/modes.ts';
export type { Limits } from './accuracy/memory.ts';
export { findThresholds, type LasingMode, type ThresholdAnswer } from './questions/threshold.ts';
export {
  findAbsorption,
  type AbsorbAnswer,
  type AbsorbingDrive,
  type AbsorbingMode,
  type PowerBalance,
} from './questions/absorb.ts';
export { defaultLevelMax, type CrossingsRequest } from './questions/crossings.ts';
export type { AxisMode } from './questions/polish-crossing.ts';
export { prepare, type Prepared, type Scope } from './questions/prepare.ts';
export { findMatches, inputsOf, type MatchAnswer, type MatchRequest, type RealMatch } from './questions/match.ts';
export { findKnobMatches } from './questions/knob-match.ts';
export { findChoices, MOST_CHOICE_CHANNELS, type Choice, type ChoicesAnswer } from './questions/choices.ts';
export { choicesRecord, knobMatchRecord, matchRecord } from './questions/match-record.ts';
export { findScattering, type ScatterAnswer, type ScatterPoint, type ScatterRequest } from './questions/scatter.ts';
export { modelledRecord, spectrumRecord } from './questions/scatter-record.ts';
export { findSpectrum, type SpectrumAnswer, type SpectrumPoint, type SpectrumRequest } from './questions/spectrum.ts';
export { certifiedError } from './projected/certified-error.ts';
export { modelSolver, type ModelSolver } from './projected/pole-residue.ts';
export type { ScatteringModel } from './projected/scattering-model.ts';
export { prepareOpenings, type DeviceChannel, type PreparedOpenings } from './questions/prepare-openings.ts';
export { findKnobCrossings, type KnobCrossing, type KnobCrossingsRequest } from './questions/knob-crossing.ts';
export {
  absorbRecord,
  knobRecord,
  modesRecord,
  thresholdRecord,
  type RunContext,
  type RunParts,
} from './questions/record.ts';
export { DEFAULT_DIGITS, FEWEST_DIGITS, MOST_DIGITS, resolutionFor, type Resolution } from './accuracy/resolution.ts';

// Threads for large factorizations.
export { startThreads, stopThreads } from './sparse/threads.ts';

// Meshes and their measures.
export { measureMesh, type MeshQuality } from './mesh/quality.ts';
export { BACKGROUND, LAYER, type Mesh } from './mesh/mesh.ts';

// Runs: kept, read back, taken away.
export { readRun, runFolder, RunStoreError, writeRun, type LoadedRun } from './results/store.ts';
export { RunFormatError } from './results/bytes.ts';
export type {
  CompleteAnswer,
  CrossingAnswer,
  DriveTerm,
  LevelAnswer,
  ModeAnswer,
  Pair,
  PowerCheck,
  RunArray,
  RunField,
  RunMark,
  RunRecord,
  ChoiceAnswerRow,
  MatchAnswerRow,
  ScatterAnswerPoint,
} from './results/format.ts';
export { fieldSampler } from './results/evaluate.ts';
export { fieldOf, type FieldSample, type FieldSampler, type RunView } from './results/run-view.ts';
export { cautionsFor, type CautionKind } from './results/cautions.ts';
export { READ_FIRST_NAME, readFirstText } from './results/read-first.ts';
export { loadModel } from './results/model-store.ts';
export { spectrumView, type SpectrumView } from './results/spectrum-view.ts';
export { spectrumTableCsv } from './results/export-spectrum-csv.ts';
export { runTouchstone, touchstoneNetwork, type TouchstoneRequest } from './results/export-touchstone.ts';
export { readTouchstone } from './results/touchstone-read.ts';
export { touchstoneText } from './results/touchstone-write.ts';
export {
  type MeasuredScattering,
  scatteringOfNetwork,
  TouchstoneError,
  type TouchstoneFormat,
  type TouchstoneNetwork,
} from './results/touchstone.ts';
export {
  analyseMeasured,
  type MeasuredAnswer,
  type MeasuredPoint,
  type MeasuredRequest,
  type MeasuredRoot,
} from './questions/measured.ts';
export { csvText } from './results/csv.ts';
export { standardGuide, STANDARD_GUIDES, type StandardGuide } from './device/standard-guides.ts';
export { guideEnds, transverseWavenumber } from './boundary/guide-modes.ts';
export { crossingTableCsv, driveTableCsv, modeTableCsv, polePathCsv } from './results/export-csv.ts';
export { fieldGridCsv, fieldLineCsv, fieldNodesCsv, MOST_ROWS, type Box } from './results/export-field-csv.ts';
export { errorText, significant, toError, withError } from './results/number-text.ts';

// Pictures.
export { deviceFigure } from './figures/device.ts';
export { meshFigure } from './figures/mesh.ts';
export { fieldFigure } from './figures/field.ts';
export { planeFigure } from './figures/plane.ts';
export { svgText } from './figures/svg.ts';
export { pngBytes } from './figures/png.ts';
export type { Drawing } from './figures/drawing.ts';
