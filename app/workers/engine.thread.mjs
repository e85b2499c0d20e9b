// The server runs under tsx, whose hooks do not reach a worker thread on Node 20: the thread loads
// its TypeScript itself.
import { tsImport } from "tsx/esm/api";

await tsImport("./engine.thread.ts", import.meta.url);
