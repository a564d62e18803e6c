declare module 'lz4js' {
  /** Expands one raw LZ4 block; returns the end position in `target`. */
  export function decompressBlock(
    source: Uint8Array,
    target: Uint8Array,
    begin: number,
    length: number,
    at: number,
  ): number;
}
