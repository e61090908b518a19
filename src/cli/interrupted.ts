/** Ended by Ctrl-C; what there is to say about what was kept. */
export class Interrupted extends Error {
  constructor(message = 'stopped; nothing was written') {
    super(message);
  }
}
