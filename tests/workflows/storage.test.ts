import { randomBytes } from "node:crypto";
import { once } from "node:events";
import { mkdtempSync, rmSync } from "node:fs";
import { createServer } from "node:http";
import type { AddressInfo } from "node:net";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { createStorage, type Storage } from "#app/services/storage.server.ts";
import {
  BUCKET,
  FAKE_KEYS,
  type StorageFake,
  startStorageFake,
} from "../../scripts/demo/storage-fake.ts";

const PAGE = "http://127.0.0.1:4300";
const PART_BYTES = 5 * 1024 * 1024;

let directory: string;
let fake: StorageFake;
let storage: Storage;

beforeAll(async () => {
  directory = mkdtempSync(join(tmpdir(), "ogee-storage-"));
  fake = await startStorageFake({ directory, port: 0, pageOrigin: PAGE });
  storage = createStorage({
    endpoint: fake.endpoint,
    region: "us-east-1",
    bucket: BUCKET,
    ...FAKE_KEYS,
  });
});

afterAll(async () => {
  await fake.stop();
  rmSync(directory, { recursive: true, force: true });
});

describe("storage that speaks S3", () => {
  it("gives back the bytes that were put, whole and as a stream, with their size", async () => {
    const bytes = randomBytes(100_000);
    await storage.put("raw/lab-one/put", bytes);
    expect(await storage.size("raw/lab-one/put")).toBe(100_000);
    expect(Buffer.from(await storage.read("raw/lab-one/put")).equals(bytes)).toBe(true);
    const { body, sizeBytes } = await storage.stream("raw/lab-one/put");
    expect(sizeBytes).toBe(100_000);
    expect(Buffer.from(await new Response(body).arrayBuffer()).equals(bytes)).toBe(true);
  });

  it("takes a file in parts by presigned addresses, and copies it byte for byte", async () => {
    const parts = [randomBytes(PART_BYTES), randomBytes(1234)];
    const key = "incoming/upload-1";
    const multipartId = await storage.startMultipart(key);
    const done: { number: number; etag: string }[] = [];
    for (const [index, bytes] of parts.entries()) {
      const number = index + 1;
      const address = await storage.presignPart(key, multipartId, number);
      const answer = await fetch(address, {
        method: "PUT",
        body: new Uint8Array(bytes),
        headers: { Origin: PAGE },
      });
      expect(answer.status).toBe(200);
      expect(answer.headers.get("access-control-allow-origin")).toBe(PAGE);
      done.push({ number, etag: answer.headers.get("etag") ?? "" });
    }
    // In the order in which they came, not of the file.
    await storage.finishMultipart(key, multipartId, done.toReversed());
    await storage.copy(key, "raw/lab-one/a name, with +%");
    await storage.delete(key);

    expect(await storage.size(key)).toBeNull();
    const copy = Buffer.from(await storage.read("raw/lab-one/a name, with +%"));
    expect(copy.equals(Buffer.concat(parts))).toBe(true);
  });

  it("presigns for ten minutes, without a checksum, and only below incoming/", async () => {
    const address = new URL(await storage.presignPart("incoming/upload-2", "some-id", 3));
    expect(address.searchParams.get("X-Amz-Expires")).toBe("600");
    expect(address.searchParams.get("partNumber")).toBe("3");
    expect([...address.searchParams.keys()].filter((key) => /checksum/i.test(key))).toEqual([]);
    await expect(storage.presignPart("raw/lab-one/put", "some-id", 1)).rejects.toThrow(
      "raw/lab-one/put is never presigned.",
    );
  });

  it("refuses a presigned address after its time", async () => {
    const key = "incoming/upload-3";
    const address = new URL(await storage.presignPart(key, await storage.startMultipart(key), 1));
    address.searchParams.set("X-Amz-Date", "20200101T000000Z");
    const answer = await fetch(address, { method: "PUT", body: "late" });
    expect(answer.status).toBe(403);
  });

  it("lets an upload be forgotten that was never finished", async () => {
    const key = "incoming/upload-4";
    await storage.abortMultipart(key, await storage.startMultipart(key));
    await storage.abortMultipart(key, "no-such-upload");
    expect(await storage.size(key)).toBeNull();
  });

  it("gives a storage up that takes the call and says nothing", async () => {
    const silent = createServer(() => {}).listen(0, "127.0.0.1");
    await once(silent, "listening");
    const { port } = silent.address() as AddressInfo;
    const asked = createStorage(
      { endpoint: `http://127.0.0.1:${port}`, region: "us-east-1", bucket: BUCKET, ...FAKE_KEYS },
      200,
    );
    await expect(asked.size("raw/lab-one/put")).rejects.toMatchObject({ name: "TimeoutError" });
    silent.closeAllConnections();
    silent.close();
  }, 30_000);

  it("says null for the size of nothing, and throws on reading it", async () => {
    expect(await storage.size("raw/lab-one/nothing")).toBeNull();
    await expect(storage.read("raw/lab-one/nothing")).rejects.toThrow();
  });

  it("is ready where the bucket answers, and not where nobody does", async () => {
    expect(await storage.ready()).toBe(true);
    const nobody = { endpoint: "http://127.0.0.1:9", region: "us-east-1", bucket: BUCKET };
    expect(await createStorage({ ...nobody, ...FAKE_KEYS }).ready()).toBe(false);
    const elsewhere = { endpoint: fake.endpoint, region: "us-east-1", bucket: "another" };
    expect(await createStorage({ ...elsewhere, ...FAKE_KEYS }).ready()).toBe(false);
  });
});
