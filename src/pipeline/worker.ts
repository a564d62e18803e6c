// Entry of a worker thread: the same task functions as in the main thread.
export { runTask } from './tasks.js';
