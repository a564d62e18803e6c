/** Exponents of mass, length, time and temperature: [M, L, T, Theta]. */
export type Dimension = readonly [number, number, number, number];

/** One standard quantity: a data-name identifier of CGNS/SIDS, or a plain trade term where the standard has none. */
export interface Quantity {
  /** Name under which the field is held and written. */
  readonly name: string;
  /** 1 scalar, 3 vector (x y z), 6 symmetric tensor (XX XY XZ YY YZ ZZ). */
  readonly components: 1 | 3 | 6;
  /** SI unit as printed. */
  readonly unit: string;
  readonly dimension: Dimension;
  /** May not be negative (the normal components, for a tensor). */
  readonly nonNegative: boolean;
  /** Spans decades near a wall and is interpolated in log space. */
  readonly logInterpolated: boolean;
  /** A property of the fluid: left alone when the flow's velocity scale is changed. */
  readonly fluidProperty: boolean;
  readonly meaning: string;
  /** Other identifiers that mean the same number. */
  readonly aliases: readonly string[];
}

interface Entry {
  readonly components?: 3 | 6;
  readonly nonNegative?: true;
  readonly log?: true;
  readonly property?: true;
  readonly aliases?: readonly string[];
}

function quantity(name: string, unit: string, dimension: Dimension, meaning: string, entry: Entry = {}): Quantity {
  return {
    name,
    components: entry.components ?? 1,
    unit,
    dimension,
    nonNegative: entry.nonNegative ?? false,
    logInterpolated: entry.log ?? false,
    fluidProperty: entry.property ?? false,
    meaning,
    aliases: entry.aliases ?? [],
  };
}

const velocity: Dimension = [0, 1, -1, 0];
const perMass: Dimension = [0, 2, -2, 0];
const diffusivity: Dimension = [0, 2, -1, 0];
const dynamicViscosity: Dimension = [1, -1, -1, 0];
const pressure: Dimension = [1, -1, -2, 0];
const length: Dimension = [0, 1, 0, 0];
const none: Dimension = [0, 0, 0, 0];

/**
 * The standard quantities. Vectors and tensors stand here once, gathered; their components carry the suffixes X Y Z
 * and XX XY XZ YY YZ ZZ.
 *
 * @see CGNS Standard Interface Data Structures, appendix A (data-name identifiers and their dimensions)
 */
export const quantities: readonly Quantity[] = [
  quantity('Velocity', 'm/s', velocity, 'velocity', { components: 3 }),
  quantity('Pressure', 'Pa', pressure, 'static pressure'),
  quantity('Density', 'kg/m3', [1, -3, 0, 0], 'density', { nonNegative: true, property: true }),
  quantity('Temperature', 'K', [0, 0, 0, 1], 'static temperature', { nonNegative: true, property: true }),
  quantity('TurbulentEnergyKinetic', 'm2/s2', perMass, 'modelled turbulent kinetic energy k', { nonNegative: true }),
  quantity('TurbulentDissipation', 'm2/s3', [0, 2, -3, 0], 'dissipation of k, epsilon', {
    nonNegative: true,
    log: true,
  }),
  quantity('TurbulentDissipationRate', '1/s', [0, 0, -1, 0], 'omega; the case says which of its two meanings holds', {
    nonNegative: true,
    log: true,
  }),
  quantity('ViscosityKinematic', 'm2/s', diffusivity, 'kinematic viscosity nu', { nonNegative: true, property: true }),
  quantity('ViscosityMolecular', 'kg/(m s)', dynamicViscosity, 'dynamic viscosity mu', {
    nonNegative: true,
    property: true,
  }),
  quantity('ViscosityEddyKinematic', 'm2/s', diffusivity, 'kinematic eddy viscosity nu_t', { nonNegative: true }),
  quantity('ViscosityEddy', 'kg/(m s)', dynamicViscosity, 'dynamic eddy viscosity mu_t', { nonNegative: true }),
  quantity('TurbulentSANuTilde', 'm2/s', diffusivity, 'working variable of the one-equation Spalart-Allmaras model', {
    nonNegative: true,
  }),
  quantity('VelocityCovariance', 'm2/s2', perMass, "u'_i u'_j, Reynolds stress per unit mass", {
    components: 6,
    nonNegative: true,
  }),
  quantity('WallDistance', 'm', length, 'distance to the nearest wall', {
    nonNegative: true,
    aliases: ['TurbulentDistance'],
  }),
  quantity('IntegralLength', 'm', length, 'L = k^(3/2) / epsilon', { nonNegative: true }),
  quantity('CellWidth', 'm', length, 'cube root of the cell volume', { nonNegative: true }),
  quantity('GridRatio', '-', none, 'IntegralLength / CellWidth', { nonNegative: true }),
  quantity('ResolvableShare', '-', none, 'share of k whose wave numbers the cell can carry', { nonNegative: true }),
  quantity('VelocityMean', 'm/s', velocity, 'mean part of the velocity of a start', { components: 3 }),
  quantity('VelocityFluctuation', 'm/s', velocity, 'superimposed fluctuation of a start', { components: 3 }),
  quantity('TurbulentEnergyKineticTotal', 'm2/s2', perMass, 'k of the precursor, resolved and modelled together', {
    nonNegative: true,
  }),
  quantity('OutsideDistance', 'm', length, 'distance to the precursor for cells outside it', { nonNegative: true }),
  quantity('Outside', '-', none, '0 inside the precursor, 1 nearest, 2 extrapolated, 3 constant', {
    nonNegative: true,
  }),
];

/** Order of the six components of a symmetric tensor everywhere in the program. */
export const tensorSuffixes = ['XX', 'XY', 'XZ', 'YY', 'YZ', 'ZZ'] as const;

/** Component suffixes of a gathered quantity, in the order in which its numbers are stored. */
export function componentSuffixes(components: number): readonly string[] {
  if (components === 3) return ['X', 'Y', 'Z'];
  if (components === 6) return tensorSuffixes;
  return [''];
}

const byName = new Map<string, Quantity>();
for (const entry of quantities) {
  for (const name of [entry.name, ...entry.aliases]) byName.set(name.toLowerCase(), entry);
}

/** The gathered quantity of this name or alias, capitals ignored. */
export function findQuantity(name: string): Quantity | undefined {
  return byName.get(name.toLowerCase());
}

/** SI unit of a standard name, component names such as `VelocityX` included; undefined for other names. */
export function unitOf(name: string): string | undefined {
  return (findQuantity(name) ?? findQuantity(name.replace(/(XX|XY|XZ|YY|YZ|ZZ|X|Y|Z)$/, '')))?.unit;
}

/**
 * Power s in which a quantity follows a change of the flow's velocity scale at fixed lengths, fluid density and fluid
 * viscosity: value' = value * factor^s, s = minus the exponent of time. 2 for k, 3 for epsilon, 1 for omega.
 */
export function velocityPower(entry: Quantity): number {
  return entry.fluidProperty || entry.dimension[2] === 0 ? 0 : -entry.dimension[2];
}

/** Power in which a quantity follows a change of lengths at fixed velocities: lengths 1, epsilon -1, omega -1. */
export function lengthPower(entry: Quantity): number {
  if (entry.fluidProperty) return 0;
  const [mass, metres, seconds] = entry.dimension;
  // At fixed density the mass scales as length cubed, at fixed velocity the time as length.
  return 3 * mass + metres + seconds;
}
