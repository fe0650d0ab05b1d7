/** What the system lacks, not what the user wrote: a full disk, say. The command line says it without a stack and exits with 1. */
export class ResourceError extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'ResourceError';
  }
}

const reasons: Readonly<Record<string, string>> = {
  ENOSPC: 'no space is left on the disk',
  EDQUOT: 'the quota of the disk is used up',
  EFBIG: 'the file would be larger than is allowed here',
  EIO: 'the disk has failed',
  EMFILE: 'too many files are open',
  ENFILE: 'too many files are open on this machine',
};

/** The error of a failed write in words where the system is to blame; else the error itself. */
export function resourceError(error: unknown, path: string): unknown {
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  return reasons[code] === undefined ? error : new ResourceError(`${path}: ${reasons[code]}`);
}
