import { afterAll, beforeAll } from 'vitest';
import { SurveyFolder } from '../run/surveyFolder.ts';
import { PostgresServer } from './postgres.ts';
import { Processes } from './processes.ts';

/** What tests of the queue play on: a folder, a server and processes, there before the first test and gone after the last. */
export interface Stage {
  folder: SurveyFolder;
  postgres: PostgresServer;
  processes: Processes;
}

export function queueStage(): Stage {
  const stage = {} as Stage;
  beforeAll(async () => {
    stage.folder = new SurveyFolder();
    stage.processes = new Processes(stage.folder.path);
    stage.postgres = await PostgresServer.start();
  }, 60_000);
  afterAll(async () => {
    await stage.processes.end();
    await stage.postgres.remove();
    stage.folder.remove();
  }, 60_000);
  return stage;
}
