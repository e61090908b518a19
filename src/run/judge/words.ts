import type { Judgement } from '../../compare/judgeResult.ts';
import { formatNumber, formatPercent, formatQuantity } from '../../elementary/quantity.ts';

/** What the sentences are made of. */
type Findings = Pick<Judgement, 'observers' | 'sound' | 'causes' | 'tolerance' | 'traces'>;

/** The judgement in a sentence: the largest error, and what a sound grid makes there; then the likeliest cause, and what a fit takes away. */
export function sentencesOf(findings: Findings): { sentence: string; details: string[] } {
  const { observers, sound } = findings;
  const all = observers.flatMap((observer) =>
    (['E', 'H'] as const).flatMap((field) => {
      const found = observer[field];
      const judged = observer.judged[field];
      return found && judged && found.relativeL2 !== null
        ? [{ name: observer.name, field, error: found.relativeL2, judged }]
        : [];
    }),
  );
  const ofE = all.filter(({ field }) => field === 'E');
  const [first, ...others] = ofE.length > 0 ? ofE : all;
  if (!first)
    return {
      sentence: 'Nothing could be judged: the exact field vanishes wherever there is a trace.',
      details: [causeText(findings)],
    };
  const worst = others.reduce((a, b) => (b.error > a.error ? b : a), first);
  const cell = sound.cellSize.every((d) => d === sound.cellSize[0])
    ? formatQuantity(sound.cellSize[0], 'm')
    : sound.cellSize.map((d) => formatQuantity(d, 'm')).join(' × ');
  const { relativeL2: expected, ratio, reason } = worst.judged.sound;
  const where = `${worst.field} at observer ${worst.name}`;
  const times = ratio === null ? '' : formatNumber(ratio, 2);
  const sentence =
    expected !== null && ratio !== null
      ? `${formatPercent(worst.error)} (${where}) where a sound Yee grid at ${cell} makes ${formatPercent(expected)}: ${times === '1' ? 'as much' : `${times} times`}.`
      : `${formatPercent(worst.error)} (${where}). The error of a sound Yee grid at ${cell} ${reason ?? 'is not known'}.`;
  const { fitted } = worst.judged;
  return {
    sentence,
    details: [
      causeText(findings),
      ...(fitted
        ? [
            `With a fitted offset of ${formatQuantity(fitted.timeOffset, 's')} and a scale of ${formatNumber(fitted.scale, 4)}, ${formatPercent(fitted.relativeL2)} of ${where} is left. ` +
              'A fitted offset absorbs dispersion as well: it does not show that the solver is right but for an offset.',
          ]
        : []),
    ],
  };
}

function causeText({ causes }: Findings): string {
  const [best] = causes.tried;
  if (causes.status === 'sound')
    return 'Nothing to explain: the traces are what a sound Yee grid makes of this scenario.';
  if (!best) return 'No cause could be tried.';
  const share = formatPercent(Math.max(0, best.explained), 3);
  if (causes.status === 'none')
    return `Likeliest cause: none of those that were tried; the best (${best.words}) explains ${share} of what is wrong.`;
  return `Likeliest cause: ${best.words}. That explains ${share} of what is wrong. Remedy: ${best.remedy}.`;
}
