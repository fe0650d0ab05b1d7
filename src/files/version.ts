import packageFile from '../../package.json';

/** Version of the program, as its package states it. */
export const version: string = packageFile.version;
