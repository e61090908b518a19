/** The integral's kernel: histories at a fixed point by delay spreading, and parts of filaments at one instant. */
export * from './history';
export * from './panel';
