import { type Result, resultSchema } from '../compare/result.ts';
import { jsonText } from '../scenario/text.ts';

/**
 * The text of `result.json`. What is written is what the published schema describes.
 * @throws Error where the result holds something that the schema does not allow, NaN among it
 */
export function resultJson(result: Result): string {
  return jsonText(resultSchema.parse(result));
}
