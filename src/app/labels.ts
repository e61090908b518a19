import { NEUTRALS, type Theme, toBytes } from '../draw/colour.ts';
import type { Label } from '../draw/label.ts';

/** CSS pixels, by what the text is. */
const SIZES: Readonly<Record<Label['role'], number>> = { title: 13, name: 12, tick: 11, scale: 11 };

const css = (colour: number): string => {
  const [r, g, b] = toBytes(colour);
  return `rgb(${r} ${g} ${b})`;
};

/**
 * The texts of an image on a canvas above it, at the screen's own resolution; those of hidden points faintly, set off from
 * the field by a halo.
 * @param imageRatio image pixels to a CSS pixel
 */
export function paintLabels(
  canvas: HTMLCanvasElement,
  labels: readonly Label[],
  theme: Theme,
  imageRatio: number,
): void {
  const context = canvas.getContext('2d')!;
  const { ink, muted, background } = NEUTRALS[theme];
  const scale = devicePixelRatio / imageRatio;
  context.setTransform(1, 0, 0, 1, 0, 0);
  context.clearRect(0, 0, canvas.width, canvas.height);
  context.lineJoin = 'round';
  for (const { x, y, text, align, baseline, role, hidden } of labels) {
    const size = SIZES[role] * devicePixelRatio;
    context.font = `${role === 'title' ? 600 : 400} ${size}px system-ui, sans-serif`;
    context.textAlign = align;
    context.textBaseline = baseline;
    context.globalAlpha = hidden ? 0.55 : 1;
    if (role !== 'title') {
      context.strokeStyle = css(background);
      context.lineWidth = 3 * devicePixelRatio;
      context.strokeText(text, x * scale, y * scale);
    }
    context.fillStyle = css(role === 'tick' || role === 'scale' ? muted : ink);
    context.fillText(text, x * scale, y * scale);
  }
  context.globalAlpha = 1;
}
