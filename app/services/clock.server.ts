/** Time, ids and randomness come in as arguments, so that a test never sleeps. */
export interface Clock {
  /** Milliseconds since 1970, UTC. */
  now(): number;
  /** A new random id. */
  newId(): string;
}

export const systemClock: Clock = {
  now: () => Date.now(),
  newId: () => crypto.randomUUID(),
};
