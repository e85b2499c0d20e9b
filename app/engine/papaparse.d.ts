// The part of papaparse that the engine uses. Its own types bring Node's with them, and the engine
// knows nothing of its surroundings.
export default Papa;
declare const Papa: {
  parse<Row>(
    text: string,
    settings: { delimiter: string; newline: string; preview?: number },
  ): { data: Row[]; errors: { type: string; code: string; message: string; row?: number }[] };
};
