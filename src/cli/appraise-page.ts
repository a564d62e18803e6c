import type { Appraisal } from '../appraisal/appraise.js';
import type { CellMesh } from '../mesh/cell-mesh.js';
import type { AppraisalReportData } from '../report/appraisal-data.js';
import { appraisalReport } from '../report/appraisal-report.js';
import { gridRatioPicture, pointsOnSlice, sharePicture, slicePicture } from '../report/figures.js';
import type { PictureBlock, ReportPage } from '../report/page.js';
import { type SliceAxis, sampleSlice, sliceMesh, sliceOutline, tellingSlice } from '../report/slices.js';

export interface AppraisePageInput {
  readonly title: string;
  readonly subtitle: string;
  readonly appraisal: Appraisal;
  readonly mesh: CellMesh;
  /** 3 x cells, metres. */
  readonly centroids: Float64Array;
  readonly k: Float64Array;
  readonly wallFaces: Int32Array;
  /** Default: the slice that shows most of k. */
  readonly slices?: readonly { readonly axis: SliceAxis; readonly position: number }[];
  readonly assumptions: readonly string[];
  readonly remarks: readonly string[];
  readonly footer: readonly string[];
}

function picturesOf(input: AppraisePageInput): { pictures: PictureBlock[]; monitorMap: PictureBlock } {
  const { appraisal, mesh } = input;
  const places = input.slices ?? [tellingSlice(mesh, input.centroids, input.k)];
  const pictures: PictureBlock[] = [];
  let monitorMap: PictureBlock | undefined;
  for (const { axis, position } of places) {
    const slice = sliceMesh(mesh, axis, position);
    const outline = {
      boundary: sliceOutline(mesh, slice),
      ...(input.wallFaces.length === 0 ? {} : { walls: sliceOutline(mesh, slice, input.wallFaces) }),
    };
    const second = appraisal.second;
    pictures.push(
      gridRatioPicture(slice, sampleSlice(slice, appraisal.fields.gridRatio), outline),
      sharePicture(slice, sampleSlice(slice, appraisal.fields.share), appraisal.wantedShare, outline),
      slicePicture(slice, sampleSlice(slice, appraisal.fields.wantedWidth), {
        title: 'Cell width wanted',
        caption: `At which ${(100 * appraisal.wantedShare).toFixed(0)} % of k would be carried.`,
        quantity: 'CellWidthWanted',
        unit: 'm',
        scale: 'log',
        ...outline,
      }),
    );
    if (second !== undefined) {
      const ratio = gridRatioPicture(slice, sampleSlice(slice, second.fields.gridRatio), outline);
      pictures.push({ ...ratio, title: 'GridRatio by the second precursor' });
    }
    monitorMap ??= slicePicture(slice, sampleSlice(slice, input.k), {
      title: 'Monitors on the map of k',
      caption: 'Probes are shown at their place in the plane, whatever their distance from it.',
      quantity: 'TurbulentEnergyKinetic',
      unit: 'm2/s2',
      points: pointsOnSlice(slice, appraisal.monitors ?? []),
      ...outline,
    });
  }
  return { pictures, monitorMap: monitorMap as PictureBlock };
}

/** The page of an appraisal with its pictures. */
export function appraisePage(input: AppraisePageInput): ReportPage {
  const { appraisal } = input;
  const { pictures, monitorMap } = picturesOf(input);
  const data: AppraisalReportData = {
    title: input.title,
    subtitle: input.subtitle,
    wantedShare: appraisal.wantedShare,
    summary: appraisal.summary,
    zones: appraisal.zones,
    regions: appraisal.regions,
    gridRatioHistogram: appraisal.gridRatioHistogram,
    shareHistogram: appraisal.shareHistogram,
    pictures,
    assumptions: input.assumptions,
    remarks: input.remarks,
    footer: input.footer,
    ...(appraisal.courantHistogram === undefined ? {} : { courantHistogram: appraisal.courantHistogram }),
    ...(appraisal.wall === undefined ? {} : { wall: appraisal.wall }),
    ...(appraisal.plan === undefined ? {} : { plan: appraisal.plan }),
    ...(appraisal.monitors === undefined ? {} : { monitors: appraisal.monitors, monitorMap }),
    ...(appraisal.second === undefined
      ? {}
      : {
          comparison: {
            words: appraisal.second.comparison.words,
            summary: appraisal.second.summary,
            gridRatioHistogram: appraisal.second.gridRatioHistogram,
            shareHistogram: appraisal.second.shareHistogram,
          },
        }),
  };
  return appraisalReport(data);
}

/** Figures of an appraisal without its fields, for --json. */
export function appraisalDocument(appraisal: Appraisal): object {
  const { wall, second } = appraisal;
  return {
    wantedShare: appraisal.wantedShare,
    summary: appraisal.summary,
    zones: appraisal.zones,
    regions: appraisal.regions,
    ...(wall === undefined
      ? {}
      : {
          wall: {
            faces: wall.spacings.faces.length,
            yPlus: wall.yPlus,
            along: wall.along,
            across: wall.across,
            words: wall.words,
          },
        }),
    ...(appraisal.plan === undefined ? {} : { plan: appraisal.plan }),
    ...(appraisal.monitors === undefined ? {} : { monitors: appraisal.monitors }),
    ...(second === undefined ? {} : { second: { summary: second.summary, comparison: second.comparison } }),
  };
}
