import { type SurveyResult, surveyResultSchema } from '../compare/surveyResult.ts';
import { jsonText } from '../scenario/text.ts';
import {
  clearanceChart,
  costChart,
  ladderChart,
  reflectionAngleChart,
  reflectionFrequencyChart,
  reflectionTimeChart,
} from './surveyCharts.ts';
import { surveyCsv } from './surveyCsv.ts';
import { surveyHtml } from './surveyHtml.ts';
import { toleranceOf } from './surveyWords.ts';
import { chartFile } from './svg.ts';

/**
 * The text of `survey-result.json`. What is written is what the published schema describes.
 * @throws Error where the result holds something that the schema does not allow, NaN among it
 */
export function surveyResultJson(result: SurveyResult): string {
  return jsonText(surveyResultSchema.parse(result));
}

/**
 * The files of a survey's folder by name: result, table, report, and every chart that there is as a file of its own.
 * @param command what to type to get it again
 */
export function surveyFiles(result: SurveyResult, command: string): Record<string, string> {
  const tolerance = toleranceOf(result);
  const charts = {
    ...Object.fromEntries(
      result.ladders.map((ladder, n) => [
        `ladder${result.ladders.length > 1 ? `-${n + 1}` : ''}`,
        ladderChart(ladder, tolerance),
      ]),
    ),
    cost: costChart(result, tolerance),
    clearance: clearanceChart(result),
    'reflection-time': reflectionTimeChart(result),
    'reflection-frequency': reflectionFrequencyChart(result),
    'reflection-angle': reflectionAngleChart(result),
  };
  return {
    'survey-result.json': surveyResultJson(result),
    'survey.csv': surveyCsv(result),
    'survey.html': surveyHtml(result, command),
    ...Object.fromEntries(
      Object.entries(charts).flatMap(([name, chart]) => (chart ? [[`${name}.svg`, chartFile(chart)]] : [])),
    ),
  };
}
