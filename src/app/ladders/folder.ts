import type { Kept } from './messages.ts';

/** How often the folder is looked into, ms. */
const EVERY = 1500;

/** What the server tells of the folder it serves. */
interface Listing {
  readonly files: readonly string[];
  /** hashes of the cases that are there */
  readonly cases: readonly string[];
}

interface Result {
  readonly survey?: { readonly vary?: unknown };
}

/** Looks into the result folder that is served with the page, again and again, while a survey elsewhere fills it. */
export class Folder {
  private readonly texts = new Map<string, string>();
  private survey: { readonly vary?: unknown } | undefined;
  private ended = false;
  private timer = 0;

  /**
   * @param onCases is given the survey and all its finished cases whenever there are more
   * @param onResult is given survey-result.json once it is there, which ends the following
   */
  constructor(
    private readonly onCases: (survey: unknown, kept: Kept) => void,
    private readonly onResult: (json: unknown) => void,
    private readonly onTrouble: (message: string) => void,
  ) {
    void this.look();
  }

  end(): void {
    this.ended = true;
    clearTimeout(this.timer);
  }

  private async look(): Promise<void> {
    try {
      const { files, cases } = (await this.read('results/')) as Listing;
      if (files.includes('survey.json'))
        this.survey ??= (await this.read('results/survey.json')) as { readonly vary?: unknown };
      if (files.includes('survey-result.json')) {
        const result = (await this.read('results/survey-result.json')) as Result;
        // One that an earlier survey left there is not waited for.
        const own =
          this.survey === undefined || JSON.stringify(result.survey?.vary) === JSON.stringify(this.survey.vary);
        if (this.ended) return;
        if (own) {
          this.onResult(result);
          return;
        }
      }
      const fresh = cases.filter((hash) => !this.texts.has(hash));
      for (const hash of fresh) this.texts.set(hash, JSON.stringify(await this.read(`results/cases/${hash}.json`)));
      if (this.ended) return;
      if (this.survey !== undefined && (fresh.length > 0 || this.texts.size === 0))
        this.onCases(this.survey, [...this.texts]);
      this.timer = setTimeout(() => void this.look(), EVERY) as unknown as number;
    } catch (error) {
      if (!this.ended) this.onTrouble((error as Error).message);
    }
  }

  private async read(path: string): Promise<unknown> {
    const answer = await fetch(path);
    if (!answer.ok) throw new Error(`${path} is not to be had (status ${answer.status})`);
    return await answer.json();
  }
}
