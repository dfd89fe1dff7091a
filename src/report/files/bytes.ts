/** Bytes on their way to a stream. */
import type { Writable } from 'node:stream';

/** Resolves when the stream has taken the bytes; rejects with its error. */
export async function writeBytes(out: Writable, bytes: Uint8Array): Promise<void> {
  await new Promise<void>((resolve, reject) => {
    out.write(bytes, (error) => (error ? reject(error) : resolve()));
  });
}
