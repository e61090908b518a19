import { surveyFiles } from '../../report/surveyFolder.ts';
import { EXAMPLES, type ExampleName } from '../../scenario/examples.ts';
import { textOf } from '../../scenario/text.ts';
import { h } from '../dom.ts';
import { halves } from '../halves.ts';
import { packedText, unpackedText } from '../link.ts';
import { notify } from '../notice.ts';
import type { Places, Started } from '../places.ts';
import { download, textBlob } from '../save.ts';
import type { Store } from '../store.ts';
import { nameOf } from '../written.ts';
import { Axes } from './axes.ts';
import { SurveyModel } from './model.ts';
import { Results } from './results.ts';
import { WallPanes } from './wallPanes.ts';

/** What the address calls the survey in the folder that is served with the page. */
const RESULTS = 'results';

/** The place of surveys: what is varied on the left, what comes of it on the right. */
export function ladders(host: HTMLElement, store: Store, places: Places): Started {
  const model = new SurveyModel(store);
  const toCompare = (index: number) => {
    const scenario = model.scenarioOf(index);
    if (!scenario) return notify('This case cannot be loaded: the result does not hold its survey.', 'bad');
    store.setText(textOf(scenario));
    places.go('compare');
  };
  const results = new Results(model, toCompare);
  const walls = new WallPanes(model);
  host.append(
    halves(
      { name: 'What is varied', element: new Axes(model).element },
      { name: 'What is found', elements: [runBar(model), results.element, walls.element] },
    ),
  );
  model.on(['survey', 'run'], () => places.changed());

  return {
    left: () => walls.rest(),
    async fields() {
      const { status, vary, combine } = model.state;
      if (status === 'following' || (status === 'shown' && followed)) return new Map([['survey', RESULTS]]);
      return new Map([['survey', await packedText(JSON.stringify({ vary, combine }))]]);
    },
    open(fields) {
      const survey = fields.get('survey');
      followed = survey === RESULTS;
      if (followed) model.follow();
      else if (survey !== undefined)
        void unpackedText(survey)
          .then((text) => {
            const { vary, combine } = JSON.parse(text);
            if (JSON.stringify([vary, combine]) !== JSON.stringify([model.state.vary, model.state.combine]))
              model.edit({ vary, combine });
          })
          .catch(() => notify('The survey in this link is damaged: it may have been cut off.', 'bad'));
    },
    take(name, json) {
      if (typeof json !== 'object' || json === null) return false;
      try {
        if ('cases' in json && 'vary' in json) {
          followed = false;
          model.show(json, name);
        } else if ('vary' in json && 'scenario' in json) model.open(json, scenarioNamed);
        else return false;
      } catch (error) {
        notify(`${name} was not opened: ${(error as Error).message}`, 'bad');
      }
      return true;
    },
  };
}

let followed = false;

function scenarioNamed(name: string): unknown {
  if (Object.hasOwn(EXAMPLES, name)) return structuredClone(EXAMPLES[name as ExampleName]);
  throw new Error('the page reads no other files: put the scenario itself there, or the name of a built-in one');
}

/** Run and Cancel, how far it is, and what can be taken away. */
function runBar(model: SurveyModel): HTMLElement {
  const { store } = model;
  const run = h('button', { type: 'button', className: 'primary' }, 'Run survey');
  const bar = h('progress', { max: 1, 'aria-label': 'Progress of the survey' });
  const stage = h('span', { className: 'muted', role: 'status' });
  const busy = () => model.state.status === 'running' || model.state.status === 'following';
  run.addEventListener('click', () => (busy() ? model.cancel() : model.run()));

  const command = () => `npx fieldassay survey ${nameOf(store)}-survey.json --out ${nameOf(store)}-survey`;
  const save = (name: string, help: string, make: () => { file: string; text: string; type: string }) => {
    const button = h('button', { type: 'button', title: help }, name);
    button.addEventListener('click', () => {
      try {
        const { file, text, type } = make();
        download(`${nameOf(store)}-${file}`, textBlob(text, type));
      } catch (error) {
        notify(`Nothing was saved: ${(error as Error).message}`, 'bad');
      }
    });
    return button;
  };
  const ofResult = (file: string, type: string) => () => ({
    file,
    text: surveyFiles(model.state.result!, command())[file]!,
    type,
  });
  const survey = save('Survey', 'The survey file, JSON: what the command line takes', () => ({
    file: 'survey.json',
    text: textOf(model.file),
    type: 'application/json',
  }));
  const files = [
    save('Report', 'Sentences, charts and tables in one HTML file', ofResult('survey.html', 'text/html')),
    save('Result', 'All figures, survey-result.json', ofResult('survey-result.json', 'application/json')),
    save('Table', 'One row a case, CSV', ofResult('survey.csv', 'text/csv')),
  ];
  const show = () => {
    const { status, stage: what, fraction, secondsLeft, message, problems, result, of } = model.state;
    run.textContent =
      status === 'running'
        ? 'Cancel'
        : status === 'following'
          ? 'Stop following'
          : status === 'cancelled'
            ? 'Go on'
            : 'Run survey';
    run.disabled = !busy() && problems.length > 0;
    bar.hidden = !busy();
    bar.value = fraction;
    const left = secondsLeft === undefined ? '' : `, ${Math.max(1, Math.ceil(secondsLeft))} s left`;
    stage.textContent =
      status === 'running'
        ? `${what}: ${Math.round(100 * fraction)} %${left}`
        : status === 'following'
          ? `Following the folder that is served: ${what}`
          : status === 'cancelled'
            ? 'Cancelled. Finished cases are kept: the run goes on from there.'
            : status === 'shown'
              ? `Shown from ${message}: read only.`
              : problems.length > 0
                ? problems.map(({ message: said }) => said).join(' ')
                : status === 'done'
                  ? ''
                  : `${of} ${of === 1 ? 'case' : 'cases'}`;
    for (const file of files) file.disabled = !result || result.cases.length === 0;
  };
  model.on(['run', 'survey', 'result'], show);
  show();
  return h(
    'div',
    { className: 'bar' },
    run,
    bar,
    stage,
    h('span', { className: 'spacer' }),
    h('span', { className: 'muted' }, 'Save'),
    h('span', { className: 'group', role: 'group', 'aria-label': 'Save' }, survey, ...files),
  );
}
