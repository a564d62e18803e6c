import type { FaceOperator } from './face-operator.js';

/** Symmetric sparse matrix by rows; the diagonal apart. */
export interface SparseMatrix {
  readonly size: number;
  readonly rowStarts: Int32Array;
  readonly columns: Int32Array;
  readonly values: Float32Array;
  readonly diagonal: Float64Array;
}

/** Columns of D: for every cell c the rows i that depend on its velocity, and the vector of the dependence. */
interface CellColumns {
  readonly starts: Int32Array;
  readonly rows: Int32Array;
  /** 3 x entries. */
  readonly vectors: Float64Array;
  /** Entry (i -> c) that mirrors the entry (c -> i). */
  readonly mates: Int32Array;
}

function cellColumns(op: FaceOperator): CellColumns {
  const { cellCount, linkCount, owner, neighbour, ownerWeights: a, neighbourWeights: b, freeCells, freeAreas } = op;
  const room = new Int32Array(cellCount + 1);
  for (let c = 0; c < cellCount; c += 1) room[c + 1] = 1;
  for (let link = 0; link < linkCount; link += 1) {
    const p = (owner[link] as number) + 1;
    const n = (neighbour[link] as number) + 1;
    room[p] = (room[p] as number) + 1;
    room[n] = (room[n] as number) + 1;
  }
  for (let c = 0; c < cellCount; c += 1) room[c + 1] = (room[c + 1] as number) + (room[c] as number);
  const rows = new Int32Array(room[cellCount] as number);
  const vectors = new Float64Array(3 * rows.length);
  const ends = room.slice(0, cellCount);
  for (let c = 0; c < cellCount; c += 1) {
    rows[ends[c] as number] = c;
    ends[c] = (ends[c] as number) + 1;
  }
  const add = (c: number, i: number, sign: number, list: Float64Array, at: number): void => {
    let e = room[c] as number;
    while (e < (ends[c] as number) && rows[e] !== i) e += 1;
    if (e === ends[c]) {
      rows[e] = i;
      ends[c] = e + 1;
    }
    for (let d = 0; d < 3; d += 1)
      vectors[3 * e + d] = (vectors[3 * e + d] as number) + sign * (list[at + d] as number);
  };
  for (let link = 0; link < linkCount; link += 1) {
    const p = owner[link] as number;
    const n = neighbour[link] as number;
    add(p, p, 1, a, 3 * link);
    add(p, n, -1, a, 3 * link);
    add(n, p, 1, b, 3 * link);
    add(n, n, -1, b, 3 * link);
  }
  for (let f = 0; f < freeCells.length; f += 1)
    add(freeCells[f] as number, freeCells[f] as number, 1, freeAreas, 3 * f);
  const mates = new Int32Array(rows.length);
  for (let c = 0; c < cellCount; c += 1) {
    for (let e = room[c] as number; e < (ends[c] as number); e += 1) {
      const i = rows[e] as number;
      let m = room[i] as number;
      while (rows[m] !== c) m += 1;
      mates[e] = m;
    }
  }
  // Entries a cell did not need (links met twice) are marked by an empty range: the ends are kept beside the starts.
  const starts = new Int32Array(2 * cellCount);
  for (let c = 0; c < cellCount; c += 1) {
    starts[2 * c] = room[c] as number;
    starts[2 * c + 1] = ends[c] as number;
  }
  return { starts, rows, vectors, mates };
}

/** Diagonal of D W D^T. */
function ownEntries(
  op: FaceOperator,
  starts: Int32Array,
  vectors: Float64Array,
  mates: Int32Array,
  rows: Int32Array,
): Float64Array {
  const own = new Float64Array(op.cellCount);
  for (let i = 0; i < op.cellCount; i += 1) {
    for (let e = starts[2 * i] as number; e < (starts[2 * i + 1] as number); e += 1) {
      const m = 3 * (mates[e] as number);
      const squared = (vectors[m] as number) ** 2 + (vectors[m + 1] as number) ** 2 + (vectors[m + 2] as number) ** 2;
      own[i] = (own[i] as number) + squared / (op.volumes[rows[e] as number] as number);
    }
  }
  return own;
}

/**
 * A graph Laplacian near D W D^T for the preconditioner: its couplings are the negative entries of D W D^T, its
 * diagonal balances them. Leaving the positive entries out only adds to the quadratic form, so the result is positive
 * semi-definite on any mesh, and constants stay in its null space.
 *
 * @param drop  couplings below this share of the root of the two diagonals are left out
 */
export function wideMatrix(op: FaceOperator, drop = 0.002): SparseMatrix {
  const { cellCount, volumes } = op;
  const { starts, rows, vectors, mates } = cellColumns(op);
  const diagonal = new Float64Array(cellCount);
  const rowStarts = new Int32Array(cellCount + 1);
  let capacity = 8 * cellCount;
  let columns = new Int32Array(capacity);
  let values = new Float32Array(capacity);
  let used = 0;
  const slotOf = new Int32Array(cellCount).fill(-1);
  let rowColumns = new Int32Array(256);
  let rowValues = new Float64Array(256);
  const own = ownEntries(op, starts, vectors, mates, rows);
  for (let i = 0; i < cellCount; i += 1) {
    let count = 0;
    for (let e = starts[2 * i] as number; e < (starts[2 * i + 1] as number); e += 1) {
      const c = rows[e] as number;
      const own = 3 * (mates[e] as number);
      const w = 1 / (volumes[c] as number);
      const x = (vectors[own] as number) * w;
      const y = (vectors[own + 1] as number) * w;
      const z = (vectors[own + 2] as number) * w;
      for (let f = starts[2 * c] as number; f < (starts[2 * c + 1] as number); f += 1) {
        const j = rows[f] as number;
        const value =
          x * (vectors[3 * f] as number) + y * (vectors[3 * f + 1] as number) + z * (vectors[3 * f + 2] as number);
        let slot = slotOf[j] as number;
        if (slot < 0) {
          if (count === rowColumns.length) {
            const more = new Int32Array(2 * count);
            more.set(rowColumns);
            rowColumns = more;
            const larger = new Float64Array(2 * count);
            larger.set(rowValues);
            rowValues = larger;
          }
          slot = count;
          slotOf[j] = slot;
          rowColumns[slot] = j;
          rowValues[slot] = 0;
          count += 1;
        }
        rowValues[slot] = (rowValues[slot] as number) + value;
      }
    }
    let excess = 0;
    for (let s = 0; s < count; s += 1) {
      slotOf[rowColumns[s] as number] = -1;
      excess += rowValues[s] as number;
    }
    if (used + count > capacity) {
      capacity = Math.ceil(capacity * 1.5) + count;
      const moreColumns = new Int32Array(capacity);
      moreColumns.set(columns);
      columns = moreColumns;
      const moreValues = new Float32Array(capacity);
      moreValues.set(values);
      values = moreValues;
    }
    // A free boundary leaves something in the row's sum; elsewhere it is rounding.
    let sum = excess > 1e-9 * (own[i] as number) ? excess : 0;
    for (let s = 0; s < count; s += 1) {
      const j = rowColumns[s] as number;
      const value = rowValues[s] as number;
      if (j === i || value > -drop * Math.sqrt((own[i] as number) * (own[j] as number))) continue;
      columns[used] = j;
      values[used] = value;
      used += 1;
      sum -= value;
    }
    diagonal[i] = sum > 0 ? sum : (own[i] as number);
    rowStarts[i + 1] = used;
  }
  return {
    size: cellCount,
    rowStarts,
    columns: columns.subarray(0, used),
    values: values.subarray(0, used),
    diagonal,
  };
}
