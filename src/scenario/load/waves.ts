import { exp } from '../../elementary/elementary.ts';
import type { WaveTerm } from '../model.ts';
import { decaying, standing } from '../profiles.ts';
import type { GivenWire } from './given.ts';

/**
 * The current's terms factor · a(s) · w(t − delay − slowness·s): forward waves have slowness 1/v; backward ones,
 * w(t − delay − (L − s)/v), slowness −1/v and the delay L/v more.
 */
export function termsOf(current: GivenWire['current'], length: number, mediumSpeed: number): WaveTerm[] {
  const profile = current.profile ?? (current.waves ? 'waves' : 'uniform');
  if (profile === 'sinusoidal')
    return [{ factor: 1, delay: 0, slowness: 0, profile: standing(length, current.wavenumber!) }];
  if (profile === 'uniform') return [{ factor: 1, delay: 0, slowness: 0 }];
  const waves = current.waves ?? [{ direction: 'forward' as const, speed: current.speed }];
  return waves
    .flatMap((wave) => bounced(wave, current.reflection, length, mediumSpeed))
    .map((wave) => termOf(wave, length));
}

/** A wave with its speed in m/s. */
interface GoingWave {
  readonly direction: 'forward' | 'backward';
  readonly speed: number;
  readonly delay: number;
  readonly factor: number;
  readonly decayLength: number | undefined;
}

function termOf({ direction, speed, delay, factor, decayLength }: GoingWave, length: number): WaveTerm {
  const slowness = 1 / speed;
  const profile = decayLength === undefined ? {} : { profile: decaying(length, decayLength, direction) };
  return direction === 'forward'
    ? { factor, delay, slowness, ...profile }
    : { factor, delay: delay + length * slowness, slowness: -slowness, ...profile };
}

/** A wave and its reflections: what arrives at an end, a way L/v later and decayed, goes back with the coefficient there. */
function bounced(
  given: NonNullable<GivenWire['current']['waves']>[number],
  reflection: GivenWire['current']['reflection'],
  length: number,
  mediumSpeed: number,
): GoingWave[] {
  const { direction, speed = 1, delay = 0, factor = 1, decayLength } = given;
  const waves: GoingWave[] = [{ direction, speed: speed * mediumSpeed, delay, factor, decayLength }];
  const left = decayLength === undefined ? 1 : exp(-length / decayLength);
  for (let n = reflection?.count ?? (reflection ? 1 : 0); n > 0; n--) {
    const last = waves.at(-1)!;
    const forward = last.direction === 'forward';
    const back = last.factor * left * ((forward ? reflection?.end : reflection?.start) ?? 0);
    if (back === 0) break;
    waves.push({
      ...last,
      direction: forward ? 'backward' : 'forward',
      delay: last.delay + length / last.speed,
      factor: back,
    });
  }
  return waves;
}
