/** Number types that the file formats store. */
export type NumberType =
  | 'Int8'
  | 'UInt8'
  | 'Int16'
  | 'UInt16'
  | 'Int32'
  | 'UInt32'
  | 'Int64'
  | 'UInt64'
  | 'Float32'
  | 'Float64';

export type NumberArray =
  | Int8Array
  | Uint8Array
  | Int16Array
  | Uint16Array
  | Int32Array
  | Uint32Array
  | BigInt64Array
  | BigUint64Array
  | Float32Array
  | Float64Array;

/** One named array of a file, read when asked for. */
export interface DataArray {
  /** Name in the file, untouched. */
  readonly name: string;
  readonly components: number;
  readonly tuples: number;
  readonly type: NumberType;
  /** Reads all values (interleaved components); every call reads anew, the caller keeps what it needs. */
  readonly load: () => NumberArray;
}

/** Cells by VTK cell-type number and point lists; polyhedra (type 42) carry their faces besides. */
export interface CellTopology {
  /** n, VTK cell-type numbers (linear types and 42; quadratic cells keep their type and all their points). */
  readonly types: Uint8Array;
  /** n + 1 starts into `connectivity`, first 0. */
  readonly offsets: Int32Array;
  readonly connectivity: Int32Array;
  /** Faces of polyhedra: per cell `nFaces, (nPoints, p0, p1, ...)*` as in VTK's `faces` array. */
  readonly polyhedronFaces?: Int32Array;
  /** n + 1 starts into `polyhedronFaces`; empty range for cells that are not polyhedra. */
  readonly polyhedronOffsets?: Int32Array;
}

/** Structured grids: numbers of points along i, j, k (i fastest). */
export interface GridStructure {
  readonly kind: 'image' | 'rectilinear' | 'curvilinear';
  readonly extent: readonly [number, number, number, number, number, number];
  readonly origin?: readonly [number, number, number];
  readonly spacing?: readonly [number, number, number];
  /** 9 numbers, row by row (image grids). */
  readonly direction?: readonly number[];
  /** Coordinates along the three axes (rectilinear grids). */
  readonly axes?: readonly [Float64Array, Float64Array, Float64Array];
}

/** A named piece of the data set: a CGNS zone, a VTK piece or block. Points and cells of zones lie one after the other. */
export interface ZoneRange {
  readonly name: string;
  readonly pointBegin: number;
  readonly pointEnd: number;
  readonly cellBegin: number;
  readonly cellEnd: number;
  readonly structure?: GridStructure;
}

export type BoundaryKind = 'wall' | 'periodic' | 'inflow' | 'outflow' | 'symmetry' | 'farfield' | 'other';

/** A named set of boundary faces as polygons of point numbers (formats that know boundary names). */
export interface BoundaryPatch {
  readonly name: string;
  readonly kind: BoundaryKind;
  /** n + 1 starts into `points`. */
  readonly offsets: Int32Array;
  readonly points: Int32Array;
}

/** What a reader presents: one merged set of points and cells, arrays by place, nothing interpreted. */
export interface Dataset {
  readonly file: string;
  /** Format identifier of the registry, for example `vtu`. */
  readonly format: string;
  /** 3 x n, interleaved, as in the file (metres unless the placement says otherwise). */
  readonly points: Float64Array;
  /** How coordinates are stored in the file, so that a copy keeps it. */
  readonly pointType: 'Float32' | 'Float64';
  /** Absent for point clouds. */
  readonly cells?: CellTopology;
  readonly pointArrays: readonly DataArray[];
  readonly cellArrays: readonly DataArray[];
  readonly zones: readonly ZoneRange[];
  readonly boundaries: readonly BoundaryPatch[];
  /** Axes without a coordinate column (CSV profiles and sections): fields are constant along them. */
  readonly missingAxes: readonly ('x' | 'y' | 'z')[];
  /** Text notes kept in the file under a name (VTK field data strings, CGNS descriptors). */
  readonly notes: ReadonlyMap<string, string>;
  /** Things the user should know that were met on reading (missing units, skipped ghost cells). */
  readonly remarks: readonly string[];
  /** Seconds of physical time, where the file says. */
  readonly time?: number;
}

/** Arrays to add to a copy of `mesh`, or to replace where the name exists. */
export interface WriteRequest {
  /** The data set whose mesh and untouched arrays are carried through. */
  readonly mesh: Dataset;
  readonly cellArrays: readonly DataArray[];
  readonly pointArrays: readonly DataArray[];
  readonly notes: ReadonlyMap<string, string>;
  /** zlib for formats that can (default: none). */
  readonly compress?: boolean;
}

/** One file format; the registry in `formats/registry.ts` lists them. */
export interface Format {
  readonly id: string;
  readonly extensions: readonly string[];
  readonly description: string;
  /** True when the first bytes (at most 4096) or the extension say so. */
  readonly recognise: (path: string, head: Uint8Array) => boolean;
  /** @throws InputError for anything wrong in the file, MachineError when it cannot be read. */
  readonly read: (path: string) => Promise<Dataset>;
  /** Writes beside and renames; absent for formats that are only read. */
  readonly write?: (path: string, request: WriteRequest) => Promise<void>;
}
