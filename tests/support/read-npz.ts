/**
 * A reader of .npz that owes nothing to the writer: members by the central directory of the zip archive (ZIP Application Note 6.3.10),
 * stored without compression, each a .npy of version 1.0 (NumPy documentation, numpy.lib.format).
 */
import { crc32 } from 'node:zlib';

export interface ReadArray {
  readonly descr: string;
  readonly shape: readonly number[];
  readonly values: readonly (number | string)[];
}

function readNpy(bytes: Buffer): ReadArray {
  if (bytes.subarray(0, 8).toString('latin1') !== '\x93NUMPY\x01\x00') throw new Error('no .npy of version 1.0');
  const start = 10 + bytes.readUInt16LE(8);
  if (start % 64 !== 0) throw new Error('the values are not aligned');
  const header = bytes.subarray(10, start).toString('latin1');
  const match = /^\{'descr': '([^']+)', 'fortran_order': False, 'shape': \(([^)]*)\), \} *\n$/.exec(header);
  if (!match) throw new Error(`a header of another form: ${header}`);
  const [, descr, tuple] = match;
  const shape = tuple.split(',').flatMap((part) => (part.trim() === '' ? [] : [Number(part)]));
  const count = shape.reduce((product, length) => product * length, 1);
  const width = Number(descr.slice(2));
  const item = descr[1] === 'U' ? 4 * width : width;
  const data = bytes.subarray(start);
  if (data.length !== count * item) throw new Error(`${data.length} bytes for ${count} values of ${item}`);
  const values = Array.from({ length: count }, (_, index) => {
    const at = index * item;
    if (descr === '<f8') return data.readDoubleLE(at);
    if (descr === '<i8') return Number(data.readBigInt64LE(at));
    if (descr[1] === 'S')
      return data
        .subarray(at, at + item)
        .toString('latin1')
        .replace(/\0+$/, '');
    const points = Array.from({ length: width }, (__, place) => data.readUInt32LE(at + 4 * place));
    return String.fromCodePoint(...points.filter((point) => point !== 0));
  });
  return { descr, shape, values };
}

/** Arrays by name, in the order of the archive. @throws where a checksum, a length or a form is wrong */
export function readNpz(archive: Buffer): Map<string, ReadArray> {
  const end = archive.length - 22;
  if (archive.readUInt32LE(end) !== 0x06054b50) throw new Error('no end of central directory');
  const arrays = new Map<string, ReadArray>();
  let at = archive.readUInt32LE(end + 16);
  for (let member = 0; member < archive.readUInt16LE(end + 10); member++) {
    if (archive.readUInt32LE(at) !== 0x02014b50) throw new Error('no entry of the central directory');
    if (archive.readUInt16LE(at + 10) !== 0) throw new Error('a compressed member');
    const size = archive.readUInt32LE(at + 24);
    const nameLength = archive.readUInt16LE(at + 28);
    const name = archive.subarray(at + 46, at + 46 + nameLength).toString('utf8');
    const local = archive.readUInt32LE(at + 42);
    const start = local + 30 + archive.readUInt16LE(local + 26) + archive.readUInt16LE(local + 28);
    const content = archive.subarray(start, start + size);
    if (crc32(content) !== archive.readUInt32LE(at + 16)) throw new Error(`${name} has another checksum`);
    arrays.set(name.replace(/\.npy$/, ''), readNpy(content));
    at += 46 + nameLength + archive.readUInt16LE(at + 30) + archive.readUInt16LE(at + 32);
  }
  return arrays;
}
