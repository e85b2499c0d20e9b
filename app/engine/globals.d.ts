// The one thing that the engine takes from its surroundings and that is not in the language:
// browsers, workers and Node.js all have it (WHATWG Encoding).
declare class TextDecoder {
  constructor(label?: string, options?: { fatal?: boolean; ignoreBOM?: boolean });
  decode(input?: Uint8Array, options?: { stream?: boolean }): string;
}
