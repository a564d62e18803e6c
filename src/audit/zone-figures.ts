/** Cells by named zone: pieces of the file, or regions of the case. */
export interface CellZones {
  readonly names: readonly string[];
  /** cells: number of the zone, -1 for none. */
  readonly zoneOf: Int32Array;
}

/** Energies and products in one zone. */
export interface ZoneFigures {
  readonly name: string;
  readonly cells: number;
  /** m3. */
  readonly volume: number;
  /** Volume means, m2/s2; null where the file does not say. */
  readonly energy: {
    readonly wanted: number | null;
    readonly resolvable: number | null;
    readonly recovered: number;
    readonly modelled: number | null;
  };
  /** Recovered over resolvable energy. */
  readonly energyRatio: number | null;
  /** Volume means XX XY XZ YY YZ ZZ, m2/s2. */
  readonly covariance: readonly [number, number, number, number, number, number];
  /** Volume rms of |div u| CellWidth / u_rms, u_rms that of the whole field; null when not handed over. */
  readonly scaledDivergence: number | null;
}

export interface ZoneInput {
  readonly volumes: Float64Array;
  readonly fluctuation: Float64Array;
  readonly wanted?: Float64Array | undefined;
  readonly resolvable?: Float64Array | undefined;
  readonly modelled?: Float64Array | undefined;
  /** cells: |div u| CellWidth / u_rms. */
  readonly scaledDivergence?: Float64Array | undefined;
}

/** Figures of every zone that holds cells. */
export function zoneFigures(zones: CellZones, input: ZoneInput): ZoneFigures[] {
  const { volumes, fluctuation: u } = input;
  return zones.names.flatMap((name, zone): ZoneFigures[] => {
    const cells: number[] = [];
    zones.zoneOf.forEach((of, c) => {
      if (of === zone) cells.push(c);
    });
    if (cells.length === 0) return [];
    const mean = (value: (c: number) => number): number => {
      let sum = 0;
      let volume = 0;
      for (const c of cells) {
        sum += volumes[c]! * value(c);
        volume += volumes[c]!;
      }
      return sum / volume;
    };
    const given = (values: Float64Array | undefined): number | null =>
      values === undefined ? null : mean((c) => values[c]!);
    const product = (i: number, j: number): number => mean((c) => u[3 * c + i]! * u[3 * c + j]!);
    const covariance = [
      product(0, 0),
      product(0, 1),
      product(0, 2),
      product(1, 1),
      product(1, 2),
      product(2, 2),
    ] as const;
    const recovered = (covariance[0] + covariance[3] + covariance[5]) / 2;
    const resolvable = given(input.resolvable);
    const scaled = input.scaledDivergence;
    return [
      {
        name,
        cells: cells.length,
        volume: cells.reduce((sum, c) => sum + volumes[c]!, 0),
        energy: { wanted: given(input.wanted), resolvable, recovered, modelled: given(input.modelled) },
        energyRatio: resolvable === null || resolvable === 0 ? null : recovered / resolvable,
        covariance,
        scaledDivergence: scaled === undefined ? null : Math.sqrt(mean((c) => scaled[c]! ** 2)),
      },
    ];
  });
}
