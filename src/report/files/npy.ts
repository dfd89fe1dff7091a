/**
 * The .npy format of NumPy, version 1.0 (NumPy documentation, numpy.lib.format): magic, a header that is a Python dictionary padded to a
 * multiple of 64 bytes, then the values, little-endian and in C order. One-dimensional arrays, and texts without dimension.
 */

/** One array: its type as NumPy spells it, its shape, and its bytes in pieces. */
export interface NpyArray {
  readonly descr: string;
  readonly shape: readonly number[];
  readonly chunks: readonly Uint8Array[];
}

const MAGIC = [0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0];
const ALIGNMENT = 64;

const bytesOf = ({ buffer, byteOffset, byteLength }: ArrayBufferView<ArrayBuffer>): Uint8Array =>
  new Uint8Array(buffer, byteOffset, byteLength);

const LITTLE_ENDIAN = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;

/** Values of 8 bytes in the order of bytes that the header promises. */
function littleEndian(values: Float64Array<ArrayBuffer> | BigInt64Array<ArrayBuffer>): Uint8Array {
  return LITTLE_ENDIAN ? bytesOf(values) : Buffer.from(bytesOf(values)).swap64();
}

/** float64; null is NaN, NumPy's way to say that there is no number. */
export function doublesArray(values: readonly (number | null)[]): NpyArray {
  return joinedDoubles([Float64Array.from(values, (value) => value ?? NaN)]);
}

/** float64, the pieces one after the other. */
export function joinedDoubles(pieces: readonly Float64Array[]): NpyArray {
  const length = pieces.reduce((sum, piece) => sum + piece.length, 0);
  return { descr: '<f8', shape: [length], chunks: pieces.map((piece) => littleEndian(Float64Array.from(piece))) };
}

/** int64. @throws RangeError for a number that is not whole */
export function wholeArray(values: readonly number[]): NpyArray {
  return { descr: '<i8', shape: [values.length], chunks: [littleEndian(BigInt64Array.from(values, BigInt))] };
}

/** Code points of a text in 4 bytes each, padded with zeros. */
function textBytes(texts: readonly string[], width: number): Uint8Array {
  const bytes = new Uint8Array(4 * width * texts.length);
  const view = new DataView(bytes.buffer);
  texts.forEach((text, row) => {
    let at = 4 * width * row;
    for (const character of text) {
      view.setUint32(at, character.codePointAt(0)!, true);
      at += 4;
    }
  });
  return bytes;
}

/** Texts of any language ('<U'); no text ends in a zero character. */
export function textArray(texts: readonly string[]): NpyArray {
  // NumPy knows no texts of width 0.
  const width = texts.reduce((most, text) => Math.max(most, Array.from(text).length), 1);
  return { descr: `<U${width}`, shape: [texts.length], chunks: [textBytes(texts, width)] };
}

/** One text: `str(array)` in Python. */
export function textScalar(text: string): NpyArray {
  return { ...textArray([text]), shape: [] };
}

/** Texts of ASCII characters ('|S'), a byte each: digests. */
export function asciiArray(texts: readonly string[]): NpyArray {
  const width = texts.reduce((most, { length }) => Math.max(most, length), 1);
  const bytes = Buffer.alloc(width * texts.length);
  texts.forEach((text, row) => bytes.write(text, width * row, 'latin1'));
  return { descr: `|S${width}`, shape: [texts.length], chunks: [bytes] };
}

/** Magic and header of an array. */
export function npyHeader({ descr, shape }: NpyArray): Uint8Array {
  const tuple = shape.length === 1 ? `(${shape[0]},)` : `(${shape.join(', ')})`;
  const text = `{'descr': '${descr}', 'fortran_order': False, 'shape': ${tuple}, }`;
  const before = MAGIC.length + 2;
  const total = Math.ceil((before + text.length + 1) / ALIGNMENT) * ALIGNMENT;
  const header = Buffer.alloc(total, ' ');
  header.set(MAGIC);
  header.writeUInt16LE(total - before, MAGIC.length);
  header.write(text, before, 'latin1');
  header[total - 1] = 0x0a;
  return header;
}
