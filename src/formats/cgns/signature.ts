const SIGNATURE = [0x89, 0x48, 0x44, 0x46, 0x0d, 0x0a, 0x1a, 0x0a];

/** True when the first bytes are those of an HDF5 file. */
export function isHdf5(head: Uint8Array): boolean {
  return SIGNATURE.every((byte, i) => head[i] === byte);
}
