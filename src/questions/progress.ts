// How does long work tell what it does?

/** Called now and then with what is being done and the share that is done, 0 … 1. It may throw to stop the work. */
export type Progress = (stage: string, done: number) => void;
