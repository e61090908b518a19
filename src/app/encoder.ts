/** Compresses pictures off the page's own thread: one after another into PNG files, then all into an animation. */
import { animatedPng, png } from '../draw/png.ts';

export type EncoderRequest =
  | { readonly kind: 'picture'; readonly bytes: Uint8ClampedArray; readonly width: number; readonly height: number }
  | { readonly kind: 'end'; readonly perSecond: number };

const pictures: Uint8Array[] = [];

addEventListener('message', ({ data }: MessageEvent<EncoderRequest>) => {
  if (data.kind === 'picture') {
    pictures.push(png({ ...data, bytes: data.bytes as Uint8ClampedArray<ArrayBuffer> }));
    postMessage({ kind: 'taken' });
  } else postMessage({ kind: 'file', bytes: animatedPng(pictures, data.perSecond) });
});
