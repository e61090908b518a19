import { percentile } from '../compare/bins.ts';
import type { DirectionModel, FarthestModel } from '../compare/farthest.ts';
import { evenDirections } from '../derived/sphere.ts';
import { cos, sin } from '../elementary/elementary.ts';
import { dispersionError, type FarField, farthestWithin } from '../lattice/farthest.ts';
import type { Lattice } from '../lattice/lattice.ts';
import { farField } from '../retarded/farField.ts';
import type { Vec3 } from '../scenario/model.ts';
import type { Question } from './question.ts';

/** Directions over the sphere, for the share of directions whose error exceeds a value. */
const SPHERE = 48;

/** Lines of a far-field spectrum, up to 1.5 times the highest significant frequency. */
const LINES = 64;
const REACH = 1.5;

/** What the Yee relation says of each direction: how far it is within the tolerance, and what to hold against the box. */
export function farthestModel(question: Question): FarthestModel {
  const { scenario, timeStep } = question;
  const lattice: Lattice = { cellSize: scenario.grid.cellSize, timeStep, medium: scenario.medium };
  const named = namedDirections();
  const sphere = evenDirections(SPHERE);
  const spectrum = spectrumAlong(question);
  const fields = [...named.map(({ direction }) => direction), ...sphere].map(spectrum);
  const strength = fields.map(({ amplitude }) => Math.sqrt(amplitude.reduce((sum, x) => sum + x * x, 0)));
  const strongest = strength.reduce((a, b) => Math.max(a, b), 0);
  if (strongest === 0) return { directions: [], percentile95: () => Number.NaN };

  const model = (name: string, index: number): DirectionModel => ({
    name,
    level: strength[index]! / strongest,
    distance: strength[index]! > 0 ? farthestWithin(scenario.tolerance, fields[index]!, lattice) : Number.NaN,
  });
  const lobe = strength.indexOf(strongest);
  const around = fields.filter((_, m) => m >= named.length && strength[m]! > 1e-6 * strongest);
  return {
    directions: [...named.map(({ name }, m) => model(name, m)), model('along the main lobe', lobe)].filter(
      ({ distance }) => !Number.isNaN(distance),
    ),
    percentile95: (distance) => {
      const errors = around.map((field) => dispersionError(field, lattice, distance));
      return percentile(
        errors,
        errors.map(() => 1),
        0.95,
      );
    },
  };
}

/** The predicted error of the lattice at a distance along a vector; NaN where nothing is radiated that way. */
export function dispersionErrorAt(question: Question, along: Vec3, distance: number): number {
  const length = Math.sqrt(along[0] * along[0] + along[1] * along[1] + along[2] * along[2]);
  const field = spectrumAlong(question)([along[0] / length, along[1] / length, along[2] / length]);
  if (!field.amplitude.some((x) => x > 0)) return Number.NaN;
  const { scenario, timeStep } = question;
  return dispersionError(field, { cellSize: scenario.grid.cellSize, timeStep, medium: scenario.medium }, distance);
}

/** Axes and space diagonals, as the verdict names them. */
function namedDirections(): { name: string; direction: Vec3 }[] {
  const list: { name: string; direction: Vec3 }[] = [];
  for (const a of [0, 1, 2])
    for (const sign of [1, -1]) {
      const direction = [0, 0, 0];
      direction[a] = sign;
      list.push({ name: `along ${sign < 0 ? '−' : ''}${'xyz'[a]}`, direction: direction as unknown as Vec3 });
    }
  const r = 1 / Math.sqrt(3);
  for (const x of [1, -1])
    for (const y of [1, -1])
      for (const z of [1, -1]) {
        const signs = [x, y, z].map((s, a) => `${s < 0 ? '−' : ''}${'xyz'[a]}`).join(', ');
        list.push({ name: `along the diagonal (${signs})`, direction: [x * r, y * r, z * r] });
      }
  return list;
}

/** |F(ω)| of the far field along a direction: a discrete Fourier sum over the window of the far field's pulse. */
function spectrumAlong({ scenario, highestFrequency, timeStep, steps }: Question): (direction: Vec3) => FarField {
  const { sources, medium, grid } = scenario;
  // The far field is told by t − r/v of the origin; parts of the source nearer to the observer come before t = 0.
  const [from, to] = [grid.box.from, grid.box.to];
  const lead = Math.sqrt([0, 1, 2].reduce((sum, a) => sum + Math.max(from[a]! ** 2, to[a]! ** 2), 0)) / medium.speed;
  const step = Math.max(timeStep, 1 / (8 * highestFrequency));
  const count = Math.ceil((steps * timeStep + 2 * lead) / step);
  const times = Float64Array.from({ length: count }, (_, n) => n * step - lead);
  const omega = Float64Array.from(
    { length: LINES },
    (_, k) => (2 * Math.PI * REACH * highestFrequency * (k + 1)) / LINES,
  );
  const real = Float64Array.from({ length: LINES * count }, (_, m) =>
    cos(omega[Math.floor(m / count)]! * times[m % count]!),
  );
  const imaginary = Float64Array.from({ length: LINES * count }, (_, m) =>
    sin(omega[Math.floor(m / count)]! * times[m % count]!),
  );
  return (direction) => {
    const { values } = farField(sources, medium, direction, times);
    const amplitude = omega.map((_, k) => {
      let square = 0;
      for (let c = 0; c < 3; c++) {
        let re = 0;
        let im = 0;
        for (let n = 0; n < count; n++) {
          const v = values[c * count + n]!;
          re += v * real[k * count + n]!;
          im += v * imaginary[k * count + n]!;
        }
        square += re * re + im * im;
      }
      return Math.sqrt(square);
    });
    return { direction, omega, amplitude };
  };
}
