import type { Storage } from "#app/services/storage.server.ts";

export interface MemoryStorage extends Storage {
  objects: Map<string, Uint8Array>;
  /** What the browser does with a presigned address; answers the part's ETag. */
  putPart(key: string, multipartId: string, part: number, bytes: Uint8Array): string;
}

/** Keeps objects in memory; misuse that the real storage would refuse is refused. */
export function memoryStorage(): MemoryStorage {
  const objects = new Map<string, Uint8Array>();
  const uploads = new Map<string, { key: string; parts: Map<number, Uint8Array> }>();
  let started = 0;

  function get(key: string): Uint8Array {
    const bytes = objects.get(key);
    if (bytes === undefined) throw new Error(`There is no object ${key}.`);
    return bytes;
  }
  function open(key: string, multipartId: string) {
    const upload = uploads.get(multipartId);
    if (upload?.key !== key) throw new Error(`There is no upload ${multipartId} of ${key}.`);
    return upload;
  }

  return {
    objects,
    putPart: (key, multipartId, part, bytes) => {
      open(key, multipartId).parts.set(part, bytes.slice());
      return `"etag-${part}-${bytes.length}"`;
    },
    presignPart: async (key, multipartId, part) => {
      if (!key.startsWith("incoming/")) throw new RangeError(`${key} is never presigned.`);
      open(key, multipartId);
      return `https://storage.example/${key}?uploadId=${multipartId}&partNumber=${part}`;
    },
    startMultipart: async (key) => {
      started += 1;
      uploads.set(`multipart-${started}`, { key, parts: new Map() });
      return `multipart-${started}`;
    },
    finishMultipart: async (key, multipartId, parts) => {
      const upload = open(key, multipartId);
      const chunks = parts.map(({ number, etag }) => {
        const bytes = upload.parts.get(number);
        if (bytes === undefined || etag !== `"etag-${number}-${bytes.length}"`) {
          throw new Error(`Part ${number} of ${key} is not what was uploaded.`);
        }
        return bytes;
      });
      objects.set(key, new Uint8Array(Buffer.concat(chunks)));
      uploads.delete(multipartId);
    },
    abortMultipart: async (_key, multipartId) => {
      uploads.delete(multipartId);
    },
    put: async (key, bytes) => {
      objects.set(key, bytes.slice());
    },
    copy: async (from, to) => {
      objects.set(to, get(from).slice());
    },
    size: async (key) => objects.get(key)?.length ?? null,
    read: async (key) => get(key).slice(),
    stream: async (key) => {
      const bytes = get(key).slice();
      return { body: new Blob([bytes]).stream(), sizeBytes: bytes.length };
    },
    delete: async (key) => {
      objects.delete(key);
    },
    ready: async () => true,
  };
}
