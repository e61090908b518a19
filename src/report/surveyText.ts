import { isDone, type LadderResult, type SurveyResult } from '../compare/surveyResult.ts';
import { formatNumber, formatQuantity } from '../elementary/quantity.ts';
import { printable } from '../scenario/text.ts';
import { caseName, cautions, countsText, headline, ladderSentences, levelText, wallsSentences } from './surveyWords.ts';
import { columns, percentOr, sectionsText } from './words.ts';

/** What `survey` prints: the choice, ladders, walls, what went wrong, and where the rest lies. */
export function surveyText(result: SurveyResult, written: readonly string[]): string {
  const trouble = result.cases.filter((each) => !isDone(each));
  const sections = [
    [
      ...(result.title === '' ? [] : [printable(result.title)]),
      printable(headline(result)),
      ...wallsSentences(result).map(printable),
      ...cautions(result),
      `${countsText(result)}.`,
    ],
    ...ladderLines(result),
    result.boundaries.length === 0
      ? []
      : [
          'Walls (reflection at the worst observer, dB of the exact peak)',
          ...columns(
            [
              ['', 'reflection', 'late', 'total', 'memory', 'time', ''],
              ...result.boundaries.map((row) => {
                const each = result.cases[row.case]!;
                return [
                  printable(caseName(row.settings)),
                  levelText(row.reflection, row.floor),
                  levelText(row.late, row.floor),
                  percentOr(row.totalError),
                  each.cost ? formatQuantity(each.cost.memoryBytes, 'B') : '',
                  each.timings ? formatQuantity(each.timings.box.seconds, 's') : '',
                  row.front ? 'on the front' : '',
                ];
              }),
            ],
            ['left', 'right', 'right', 'right', 'right', 'right', 'left'],
          ),
        ],
    result.ladders.length > 0 || result.boundaries.length > 0
      ? []
      : columns(
          [
            ['', 'total', 'memory', 'time'],
            ...result.cases
              .filter(isDone)
              .map((each) => [
                printable(caseName(each.settings)),
                percentOr(each.budget.total.relativeL2),
                formatQuantity(each.cost.memoryBytes, 'B'),
                formatQuantity(each.timings.box.seconds, 's'),
              ]),
          ],
          ['left', 'right', 'right', 'right'],
        ),
    trouble.map((each) => `${each.status}: ${printable(caseName(each.settings))}: ${printable(each.reason ?? '')}`),
    written.length === 0 ? [] : [`Written: ${written.map(printable).join(', ')}`],
  ];
  return sectionsText(sections);
}

/** One ladder in full; of several a line each. */
function ladderLines({ ladders }: SurveyResult): string[][] {
  if (ladders.length === 0) return [];
  const order = (value: number | null) => (value === null ? '—' : formatNumber(value, 3));
  const error = ({ errors, sizes }: LadderResult, n: number) =>
    `${percentOr(errors[n] ?? null)} at ${formatQuantity(sizes[n]!, 'm')}`;
  const index = ({ gci }: LadderResult) =>
    gci.value === null ? '—' : `${percentOr(gci.value)} ${gci.covered ? 'covers' : 'misses'}`;
  if (ladders.length > 1)
    return [
      [
        'Convergence (error of the coarsest and the finest grid, orders, grid convergence index and whether it covers the true error)',
        ...columns(
          ladders.map((ladder) => [
            printable(caseName(ladder.settings)),
            error(ladder, 0),
            error(ladder, ladder.sizes.length - 1),
            ladder.orders.map(order).join(', '),
            index(ladder),
          ]),
          ['left', 'right', 'right', 'right', 'right'],
        ),
      ],
    ];
  const [ladder] = ladders;
  return [
    [
      'Convergence',
      ...columns(
        [
          ['cells', 'total', 'order'],
          ...ladder!.sizes.map((size, n) => [
            formatQuantity(size, 'm'),
            percentOr(ladder!.errors[n] ?? null),
            n === 0 ? '' : order(ladder!.orders[n - 1] ?? null),
          ]),
        ],
        ['right', 'right', 'right'],
      ),
      ...ladderSentences(ladder!).slice(1),
    ],
  ];
}
