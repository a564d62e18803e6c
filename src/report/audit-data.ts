import type { MonitorFigures, PlanFigures } from './appraisal-data.js';
import type { HistogramData } from './figures.js';
import type { PictureBlock, TableBlock } from './page.js';

export interface DivergenceFigures {
  /** |div u| CellWidth / u_rms. */
  readonly scaledRms: number;
  readonly scaledP99: number;
  readonly scaledMax: number;
}

/** Measures of a start under the names of the audit's JSON. */
export interface AuditReportFigures {
  readonly cells: number;
  readonly volume: number;
  readonly energy: {
    readonly wanted: number;
    readonly resolvable: number;
    readonly recovered: number;
    readonly modelled: number;
  };
  readonly divergence: { readonly before?: DivergenceFigures; readonly after: DivergenceFigures };
  /** Share of fluctuation energy that a discrete projection removes. */
  readonly projectionLoss?: number;
  /** Volume mean XX XY XZ YY YZ ZZ, m2/s2; wanted ones where they are known. */
  readonly covariance: readonly number[];
  readonly covarianceWanted?: readonly number[];
  readonly velocityMax: number;
  readonly timeStepForCourantOne: number;
}

export interface SpectrumFigures {
  /** rad/m and m3/s2. */
  readonly waveNumber: ArrayLike<number>;
  readonly measured: ArrayLike<number>;
  readonly model?: { readonly waveNumber: ArrayLike<number>; readonly density: ArrayLike<number> };
  readonly cutoffs: readonly { readonly value: number; readonly label: string }[];
  readonly caption: string;
}

/** Wanted against recovered along a line through the mesh. */
export interface ProfileFigures {
  readonly title: string;
  readonly caption: string;
  readonly coordinate: string;
  readonly unit: string;
  readonly quantityUnit: string;
  readonly curves: readonly {
    readonly name: string;
    readonly x: ArrayLike<number>;
    readonly wanted: ArrayLike<number>;
    readonly recovered: ArrayLike<number>;
  }[];
}

export interface CorrelationFigures {
  readonly name: string;
  readonly longitudinal: number;
  readonly transverse: number;
}

export interface AuditReportData {
  readonly title: string;
  readonly subtitle?: string;
  readonly audit: AuditReportFigures;
  readonly zones?: readonly { readonly name: string; readonly audit: AuditReportFigures }[];
  readonly spectrum?: SpectrumFigures;
  readonly profiles?: readonly ProfileFigures[];
  readonly correlations?: readonly CorrelationFigures[];
  readonly divergenceBefore?: HistogramData;
  readonly divergenceAfter?: HistogramData;
  /** How divergence was measured (operator, weights), for the captions. */
  readonly operator: string;
  /** At the time step named in its caption. */
  readonly courant?: { readonly histogram: HistogramData; readonly timeStep: number };
  readonly gridRatioHistogram?: HistogramData;
  readonly shareHistogram?: HistogramData;
  readonly pictures: readonly PictureBlock[];
  readonly tables?: readonly TableBlock[];
  readonly assumptions: readonly string[];
  readonly remarks: readonly string[];
  readonly footer: readonly string[];
}

export interface RunReportData extends AuditReportData {
  readonly checks: readonly {
    readonly name: string;
    readonly limit: number;
    readonly value: number;
    readonly passed: boolean;
    readonly meaning: string;
  }[];
  /** What was done, one sentence a stage. */
  readonly steps: readonly string[];
  readonly files: readonly { readonly role: string; readonly path: string; readonly sha256?: string }[];
  readonly before: readonly PictureBlock[];
  readonly plan?: PlanFigures;
  readonly monitors?: readonly MonitorFigures[];
  readonly monitorMap?: PictureBlock;
  readonly seconds?: Readonly<Record<string, number>>;
}
