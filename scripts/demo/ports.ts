import { createServer } from "node:net";

/** The port itself where it is free on loopback, else the next one that is. */
export async function findFreePort(from: number): Promise<number> {
  for (let port = from; port < from + 100; port++) {
    if (await isFree(port)) return port;
  }
  throw new Error(`No free port between ${from} and ${from + 99} on 127.0.0.1.`);
}

export function isFree(port: number): Promise<boolean> {
  return new Promise((resolve) => {
    const probe = createServer();
    probe.once("error", () => resolve(false));
    probe.listen(port, "127.0.0.1", () => probe.close(() => resolve(true)));
  });
}
