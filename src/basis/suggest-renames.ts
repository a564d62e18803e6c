import type { DataArray } from './dataset.js';
import { isStandardName, standardNames } from './quantity-slots.js';

/** One proposal: the array of the file that may be the standard quantity, and why it looks so. */
export interface RenameProposal {
  readonly standard: string;
  readonly inFile: string;
  readonly reason: string;
}

/** Symbols of textbooks and plain words, without capitals and separators, by number of components. */
const scalarSymbols: Readonly<Record<string, string>> = {
  u: 'VelocityX',
  v: 'VelocityY',
  w: 'VelocityZ',
  ux: 'VelocityX',
  uy: 'VelocityY',
  uz: 'VelocityZ',
  xvelocity: 'VelocityX',
  yvelocity: 'VelocityY',
  zvelocity: 'VelocityZ',
  k: 'TurbulentEnergyKinetic',
  tke: 'TurbulentEnergyKinetic',
  turbulentkineticenergy: 'TurbulentEnergyKinetic',
  turbulenceenergy: 'TurbulentEnergyKinetic',
  eps: 'TurbulentDissipation',
  epsilon: 'TurbulentDissipation',
  dissipation: 'TurbulentDissipation',
  omega: 'TurbulentDissipationRate',
  specificdissipationrate: 'TurbulentDissipationRate',
  p: 'Pressure',
  staticpressure: 'Pressure',
  rho: 'Density',
  t: 'Temperature',
  temp: 'Temperature',
  nu: 'ViscosityKinematic',
  kinematicviscosity: 'ViscosityKinematic',
  mu: 'ViscosityMolecular',
  dynamicviscosity: 'ViscosityMolecular',
  nut: 'ViscosityEddyKinematic',
  mut: 'ViscosityEddy',
  eddyviscosity: 'ViscosityEddyKinematic',
  turbulentviscosity: 'ViscosityEddyKinematic',
  nutilde: 'TurbulentSANuTilde',
  walldist: 'WallDistance',
  distancetowall: 'WallDistance',
  uu: 'VelocityCovarianceXX',
  uv: 'VelocityCovarianceXY',
  uw: 'VelocityCovarianceXZ',
  vv: 'VelocityCovarianceYY',
  vw: 'VelocityCovarianceYZ',
  ww: 'VelocityCovarianceZZ',
};
const vectorSymbols: Readonly<Record<string, string>> = { u: 'Velocity', vel: 'Velocity', v: 'Velocity' };
const tensorSymbols: Readonly<Record<string, string>> = { uu: 'VelocityCovariance', uiuj: 'VelocityCovariance' };

/** Letters and digits only, without capitals, without a unit in brackets, a prime or an averaging bar's word. */
function bare(name: string): string {
  return name
    .replace(/[[(].*$/, '')
    .toLowerCase()
    .replace(/^(mean|avg|average)[^a-z0-9]/, '')
    .replace(/[^a-z0-9]/g, '');
}

const bareStandard = new Map(standardNames.map((name) => [bare(name), name]));

function symbolOf(key: string, components: number): string | undefined {
  if (components === 1) return scalarSymbols[key];
  if (components === 3) return vectorSymbols[key];
  return components === 9 ? tensorSymbols[key] : undefined;
}

/**
 * Which arrays look like standard quantities although their names are not standard: for proposals to the user, never
 * taken without being asked. No standard name is proposed twice or when the file holds it.
 */
export function suggestRenames(arrays: readonly DataArray[]): RenameProposal[] {
  const proposals: RenameProposal[] = [];
  const taken = new Set(arrays.filter((array) => isStandardName(array.name)).map((array) => array.name.toLowerCase()));
  for (const array of arrays) {
    if (isStandardName(array.name)) continue;
    const key = bare(array.name);
    const spelled = bareStandard.get(key);
    const standard = spelled ?? symbolOf(key, array.components);
    if (standard === undefined || taken.has(standard.toLowerCase())) continue;
    taken.add(standard.toLowerCase());
    const reason =
      spelled === undefined ? 'the usual symbol or words for it' : 'the standard name, spelled differently';
    proposals.push({ standard, inFile: array.name, reason });
  }
  return proposals;
}
