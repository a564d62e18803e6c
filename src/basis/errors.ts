/** What a user can put right: names the file, the place in it, what is wrong and what to do. Exit code 2. */
export interface InputErrorDetails {
  /** Path as the user gave it. */
  readonly file?: string;
  /** Line, zone, array or case key inside the file. */
  readonly place?: string;
  /** What is wrong, without a full stop. */
  readonly cause: string;
  /** What to do about it, without a full stop. */
  readonly remedy?: string;
}

function sentence(details: InputErrorDetails): string {
  const where = [details.file, details.place].filter((part) => part !== undefined && part !== '').join(', ');
  const head = where === '' ? details.cause : `${where}: ${details.cause}`;
  return details.remedy === undefined ? `${head}.` : `${head}; ${details.remedy}.`;
}

/** Bad usage or bad input; printed as one sentence, exit code 2, nothing written. */
export class InputError extends Error {
  readonly details: InputErrorDetails;

  constructor(details: InputErrorDetails) {
    super(sentence(details));
    this.name = 'InputError';
    this.details = details;
  }
}

/** The machine refused (no memory, no disk, file not readable); exit code 3. */
export class MachineError extends Error {
  readonly details: InputErrorDetails;

  constructor(details: InputErrorDetails) {
    super(sentence(details));
    this.name = 'MachineError';
    this.details = details;
  }
}
