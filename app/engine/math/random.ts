/** A seeded source of random numbers: the same seed gives the same sequence on every machine. */
export interface Random {
  /** Uniform over the whole numbers 0 … 2³² − 1. */
  nextUint32(): number;
  /** Uniform over 0 … n − 1, without bias. @throws RangeError where n is not 1 … 2³² */
  nextInt(n: number): number;
}

/**
 * xoshiro128** 1.1 (Blackman & Vigna 2018; 2021, ACM Trans. Math. Softw. 47:36), its state filled
 * from the seed by SplitMix64, as its authors advise.
 *
 * @param seed  a whole number within ± 2⁵³
 * @throws RangeError for another seed
 */
export function seededRandom(seed: number): Random {
  if (!Number.isSafeInteger(seed)) throw new RangeError(`seed ${seed}: it must be a whole number`);
  const [first = 0n, second = 0n] = splitMix64(BigInt(seed), 2);
  return xoshiro128(low32(first), high32(first), low32(second), high32(second));
}

/** The generator from a given state of four 32-bit words, not all 0. */
export function xoshiro128(w0: number, w1: number, w2: number, w3: number): Random {
  let s0 = w0 >>> 0;
  let s1 = w1 >>> 0;
  let s2 = w2 >>> 0;
  let s3 = w3 >>> 0;
  if ((s0 | s1 | s2 | s3) === 0) throw new RangeError("a state of zeros only yields zeros");

  function nextUint32(): number {
    const result = Math.imul(rotateLeft(Math.imul(s1, 5), 7), 9) >>> 0;
    const t = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= t;
    s3 = rotateLeft(s3, 11);
    return result;
  }

  let bound = Number.NaN;
  let limit = 0;
  function nextInt(n: number): number {
    if (n !== bound) {
      if (!Number.isInteger(n) || n < 1 || n > 2 ** 32) throw new RangeError(`one of ${n}`);
      bound = n;
      // Values from the last, incomplete run of n are thrown away: the rest has no bias.
      limit = 2 ** 32 - (2 ** 32 % n);
    }
    for (;;) {
      const value = nextUint32();
      // The remainder; % is several times slower for numbers over 2^31.
      if (value < limit) return value - n * Math.floor(value / n);
    }
  }

  return { nextUint32, nextInt };
}

/** The first `count` outputs of SplitMix64 (Steele, Lea & Flood 2014) from a seed. */
export function splitMix64(seed: bigint, count: number): bigint[] {
  const outputs: bigint[] = [];
  let state = BigInt.asUintN(64, seed);
  for (let i = 0; i < count; i++) {
    state = BigInt.asUintN(64, state + 0x9e3779b97f4a7c15n);
    let z = state;
    z = BigInt.asUintN(64, (z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n);
    z = BigInt.asUintN(64, (z ^ (z >> 27n)) * 0x94d049bb133111ebn);
    outputs.push(z ^ (z >> 31n));
  }
  return outputs;
}

function rotateLeft(x: number, k: number): number {
  return (x << k) | (x >>> (32 - k));
}

function low32(x: bigint): number {
  return Number(x & 0xffffffffn);
}

function high32(x: bigint): number {
  return Number(x >> 32n);
}
