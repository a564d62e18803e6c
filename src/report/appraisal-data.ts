import type { HistogramData } from './figures.js';
import type { PictureBlock } from './page.js';

/** Figures of a set of cells (the appraisal's summary). */
export interface AppraisalSummary {
  readonly cells: number;
  readonly volume: number;
  readonly quietVolume: number;
  readonly ratioBelow5: number;
  readonly ratio5to10: number;
  readonly ratioFrom10: number;
  readonly meanShare: number;
  readonly meanGridRatio: number;
  readonly meanLength: number;
  readonly meanWidth: number;
  readonly meanWantedWidth: number;
  readonly energyAboveLine: number;
  readonly impliedCells: number;
  readonly impliedCellsRefineOnly: number;
  readonly meanWidthOverKolmogorov?: number;
  readonly meanWidthOverTaylor?: number;
  readonly verdict: 'resolves' | 'marginal' | 'too coarse' | 'quiet';
  readonly words: string;
}

export interface PlanFigures {
  readonly timeStep: number;
  readonly timeStepBy: string;
  readonly courantMax: number;
  readonly courantP99: number;
  readonly bulkSpeed: number;
  readonly flowThroughTime: number;
  readonly turnoverTime: number;
  readonly integralTime: number;
  readonly transient: number;
  readonly averagingForMean: number;
  readonly averagingForVariance: number;
  readonly averaging: number;
  readonly steps: number;
  readonly costHours?: number;
  readonly assumptions: readonly string[];
}

export interface MonitorFigures {
  readonly name: string;
  readonly kind: string;
  readonly position: readonly [number, number, number];
  readonly meanSpeed: number;
  readonly integralLength: number;
  readonly cellWidth: number;
  readonly cutoffWaveNumber: number;
  readonly cutoffFrequency: number;
  readonly samplingInterval: number;
  readonly taylorHolds: boolean;
}

export interface WallFigures {
  /** 50th and 95th percentile by area, of y+ of the first cell centre and of the spacings along and across. */
  readonly yPlus: readonly [number, number];
  readonly along: readonly [number, number];
  readonly across: readonly [number, number];
  readonly words: string;
  readonly yPlusHistogram: HistogramData;
}

export interface AppraisalReportData {
  readonly title: string;
  readonly subtitle?: string;
  readonly wantedShare: number;
  readonly summary: AppraisalSummary;
  readonly zones?: readonly { readonly name: string; readonly summary: AppraisalSummary }[];
  readonly regions: readonly {
    readonly low: readonly [number, number, number];
    readonly high: readonly [number, number, number];
    readonly deficitShare: number;
    readonly summary: AppraisalSummary;
  }[];
  readonly gridRatioHistogram: HistogramData;
  readonly shareHistogram: HistogramData;
  readonly courantHistogram?: HistogramData;
  readonly wall?: WallFigures;
  readonly plan?: PlanFigures;
  readonly monitors?: readonly MonitorFigures[];
  /** Of the second precursor, where two are compared. */
  readonly comparison?: {
    readonly words: string;
    readonly summary: AppraisalSummary;
    readonly gridRatioHistogram: HistogramData;
    readonly shareHistogram: HistogramData;
  };
  /** GridRatio, share, wanted width; then the monitor map. */
  readonly pictures: readonly PictureBlock[];
  readonly monitorMap?: PictureBlock;
  readonly assumptions: readonly string[];
  readonly remarks: readonly string[];
  readonly footer: readonly string[];
}
