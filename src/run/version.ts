import packageJson from '../../package.json' with { type: 'json' };

/** Of Fieldassay. */
export const VERSION: string = packageJson.version;
