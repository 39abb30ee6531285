import { InputError } from '../input-error.js';

const WHAT_TO_DO: Readonly<Record<string, string>> = {
  EACCES: 'it may not be written by this user: change its permissions or choose another place',
  EPERM: 'it may not be written by this user: change its permissions or choose another place',
  EROFS: 'it lies on a read-only file system: choose another place',
  ENOSPC: 'no space is left on the device: free some and run again',
  EDQUOT: 'the disk quota is used up: free some space and run again',
  EFBIG: 'it grows beyond the largest size allowed for a file: raise the limit (ulimit -f) and run again',
  ENOTDIR: 'a part of the path is a file, not a folder: choose another place',
  EEXIST: 'a part of the path is a file, not a folder: choose another place',
  ENOENT: 'it is not there, or was removed while the run was at work',
  EBUSY: 'it is in use, or the mount point of a file system: name a folder inside it',
  ELOOP: 'its symbolic links go round in a circle',
  ENAMETOOLONG: 'its name is too long',
  ENOLCK: 'its file system has no file locks: choose a place on another',
  EIO: 'the device reports an error: look into the system log',
  EMFILE: 'too many files are open: raise the limit (ulimit -n) and run again',
};

/**
 * Does file work, and turns an error of the operating system into one line that says what to do.
 *
 * A full disk or a folder without write permission is no fault of the program: the command ends with
 * status 2, like for any other thing that the user has to put right.
 */
export function onFiles<T>(subject: string, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw fileError(subject, error);
  }
}

/** The error as an InputError about `subject` if the operating system raised it, and as it is otherwise. */
export function fileError(subject: string, error: unknown): unknown {
  const code = (error as NodeJS.ErrnoException).code;
  if (error instanceof InputError || code === undefined || !/^E[A-Z0-9]+$/.test(code)) return error;
  return new InputError(`${subject}: ${WHAT_TO_DO[code] ?? (error as Error).message} (${code})`, {
    cause: error,
  });
}
