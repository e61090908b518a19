import { encode } from 'fast-png';
import type { Surface } from './surface.ts';

type Bytes = Uint8Array<ArrayBufferLike>;

/** An image as a PNG file. */
export function png({ bytes, width, height }: Pick<Surface, 'bytes' | 'width' | 'height'>): Bytes {
  const rgb = new Uint8Array(width * height * 3);
  for (let n = 0, k = 0; n < bytes.length; n += 4) {
    rgb[k++] = bytes[n]!;
    rgb[k++] = bytes[n + 1]!;
    rgb[k++] = bytes[n + 2]!;
  }
  return encode({ width, height, data: rgb, channels: 3 }, { zlib: { level: 6 } });
}

/** The chunks of a PNG file, in order (PNG, third edition, W3C 2025, §5.3): length, type, data, check sum. */
function chunksOf(file: Bytes): { type: string; data: Bytes }[] {
  const view = new DataView(file.buffer, file.byteOffset, file.byteLength);
  const chunks = [];
  for (let at = 8; at < file.length; ) {
    const length = view.getUint32(at);
    const type = String.fromCharCode(...file.subarray(at + 4, at + 8));
    chunks.push({ type, data: file.subarray(at + 8, at + 8 + length) });
    at += length + 12;
  }
  return chunks;
}

const CRC_TABLE = Uint32Array.from({ length: 256 }, (_, n) => {
  let c = n;
  for (let k = 0; k < 8; k++) c = c & 1 ? 0xedb88320 ^ (c >>> 1) : c >>> 1;
  return c;
});

/** The check sum of a chunk's type and data: CRC-32 of ISO 3309 (PNG, annex D). */
function checkSum(bytes: Bytes): number {
  let c = 0xffffffff;
  for (const byte of bytes) c = CRC_TABLE[(c ^ byte) & 255]! ^ (c >>> 8);
  return (c ^ 0xffffffff) >>> 0;
}

function chunk(type: string, data: ArrayLike<number>): Bytes {
  const bytes = new Uint8Array(data.length + 12);
  const view = new DataView(bytes.buffer);
  view.setUint32(0, data.length);
  for (let k = 0; k < 4; k++) bytes[4 + k] = type.charCodeAt(k);
  bytes.set(data, 8);
  view.setUint32(data.length + 8, checkSum(bytes.subarray(4, data.length + 8)));
  return bytes;
}

/** Numbers in network order: of four bytes each, or of two where the width says so. */
function fields(...values: readonly (readonly [value: number, width: 1 | 2 | 4])[]): number[] {
  return values.flatMap(([value, width]) =>
    Array.from({ length: width }, (_, k) => (value >>> (8 * (width - 1 - k))) & 255),
  );
}

/**
 * Pictures of equal size as an animated PNG, repeated for ever (PNG, third edition, §11.3.6): the first picture's own
 * file, and each later one's compressed data as frame data. Takes the pictures as PNG files, so that a long animation is
 * compressed picture by picture and holds none of them raw.
 * @param pictures PNG files made by `png`
 * @param perSecond pictures a second, > 0
 * @throws Error for no pictures
 */
export function animatedPng(pictures: readonly Bytes[], perSecond: number): Bytes {
  const [first] = pictures;
  if (!first) throw new Error('An animation of 0 pictures: give at least one.');
  const [header, ...firstRest] = chunksOf(first);
  const view = new DataView(header!.data.buffer, header!.data.byteOffset);
  const [width, height] = [view.getUint32(0), view.getUint32(4)];
  const milliseconds = Math.max(1, Math.round(1000 / perSecond));
  let sequence = 0;
  const frameControl = () =>
    chunk(
      'fcTL',
      fields([sequence++, 4], [width, 4], [height, 4], [0, 4], [0, 4], [milliseconds, 2], [1000, 2], [0, 1], [0, 1]),
    );
  const parts = [
    first.subarray(0, 8),
    chunk('IHDR', header!.data),
    chunk('acTL', fields([pictures.length, 4], [0, 4])),
  ];
  pictures.forEach((picture, n) => {
    parts.push(frameControl());
    for (const { type, data } of n === 0 ? firstRest : chunksOf(picture)) {
      if (type !== 'IDAT') continue;
      if (n === 0) parts.push(chunk('IDAT', data));
      else {
        const framed = new Uint8Array(data.length + 4);
        framed.set(fields([sequence++, 4]));
        framed.set(data, 4);
        parts.push(chunk('fdAT', framed));
      }
    }
  });
  parts.push(chunk('IEND', []));
  const file = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    file.set(part, at);
    at += part.length;
  }
  return file;
}
