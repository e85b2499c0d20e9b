import {
  AbortMultipartUploadCommand,
  CompleteMultipartUploadCommand,
  CopyObjectCommand,
  CreateMultipartUploadCommand,
  DeleteObjectCommand,
  GetObjectCommand,
  HeadBucketCommand,
  HeadObjectCommand,
  PutObjectCommand,
  S3Client,
  S3ServiceException,
  UploadPartCommand,
} from "@aws-sdk/client-s3";
import { getSignedUrl } from "@aws-sdk/s3-request-presigner";
import type { StorageEnv } from "#app/env.server.ts";

/** Raw files in S3-compatible storage. */
export interface Storage {
  /** Presigned address for one PUT of one part, 10 minutes. Only below `incoming/`. */
  presignPart(key: string, multipartId: string, part: number): Promise<string>;
  startMultipart(key: string): Promise<string>;
  finishMultipart(
    key: string,
    multipartId: string,
    parts: { number: number; etag: string }[],
  ): Promise<void>;
  /** Forgets the parts of an upload that was not finished; one that is gone already is no error. */
  abortMultipart(key: string, multipartId: string): Promise<void>;
  put(key: string, bytes: Uint8Array): Promise<void>;
  copy(from: string, to: string): Promise<void>;
  /** Size in bytes, or null where there is no such object. */
  size(key: string): Promise<number | null>;
  /** The whole object; throws where there is none. */
  read(key: string): Promise<Uint8Array>;
  stream(key: string): Promise<{ body: ReadableStream<Uint8Array>; sizeBytes: number }>;
  delete(key: string): Promise<void>;
  /** Whether the bucket answers. */
  ready(): Promise<boolean>;
}

const PRESIGNED_S = 600;
const READY_TIMEOUT_MS = 2000;
const CONNECT_TIMEOUT_MS = 5000;
/**
 * A storage that says nothing for so long has failed: by default a request would wait for ever, and
 * with it the background work. Copying the largest file inside a storage takes less.
 */
const SILENCE_TIMEOUT_MS = 120_000;

/** @param silenceTimeoutMs  shorter for tests */
export function createStorage(env: StorageEnv, silenceTimeoutMs = SILENCE_TIMEOUT_MS): Storage {
  const Bucket = env.bucket;
  // The client's packages are pinned to releases that run on this Node; it would warn of later ones.
  process.env.AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED ??= "true";
  const client = new S3Client({
    endpoint: env.endpoint,
    region: env.region,
    credentials: { accessKeyId: env.accessKeyId, secretAccessKey: env.secretAccessKey },
    forcePathStyle: true,
    requestHandler: { connectionTimeout: CONNECT_TIMEOUT_MS, socketTimeout: silenceTimeoutMs },
    // The defaults put checksums into presigned addresses and into streams; not every storage that
    // speaks S3 knows them, and some keep them as part of the object. We hash what arrives ourselves.
    requestChecksumCalculation: "WHEN_REQUIRED",
    responseChecksumValidation: "WHEN_REQUIRED",
  });

  async function get(key: string) {
    const { Body, ContentLength } = await client.send(new GetObjectCommand({ Bucket, Key: key }));
    if (Body === undefined) throw new Error(`The storage answered without the object ${key}.`);
    return { body: Body, sizeBytes: ContentLength ?? 0 };
  }

  return {
    presignPart: async (key, multipartId, part) => {
      // What was taken in is never at an address that a browser can write to.
      if (!key.startsWith("incoming/")) throw new RangeError(`${key} is never presigned.`);
      const command = new UploadPartCommand({
        Bucket,
        Key: key,
        UploadId: multipartId,
        PartNumber: part,
      });
      return getSignedUrl(client, command, { expiresIn: PRESIGNED_S });
    },
    startMultipart: async (key) => {
      const { UploadId } = await client.send(
        new CreateMultipartUploadCommand({ Bucket, Key: key }),
      );
      if (UploadId === undefined) throw new Error(`The storage opened no upload for ${key}.`);
      return UploadId;
    },
    finishMultipart: async (key, multipartId, parts) => {
      const Parts = parts
        .toSorted((a, b) => a.number - b.number)
        .map(({ number, etag }) => ({ PartNumber: number, ETag: etag }));
      await client.send(
        new CompleteMultipartUploadCommand({
          Bucket,
          Key: key,
          UploadId: multipartId,
          MultipartUpload: { Parts },
        }),
      );
    },
    abortMultipart: async (key, multipartId) => {
      try {
        await client.send(
          new AbortMultipartUploadCommand({ Bucket, Key: key, UploadId: multipartId }),
        );
      } catch (error) {
        // Not there any more; or a small storage that has no such request, and keeps no bill.
        const status = statusOf(error);
        if (status !== 404 && status !== 405 && status !== 501) throw error;
      }
    },
    put: async (key, bytes) => {
      await client.send(new PutObjectCommand({ Bucket, Key: key, Body: bytes }));
    },
    copy: async (from, to) => {
      const source = `${Bucket}/${from.split("/").map(encodeURIComponent).join("/")}`;
      await client.send(new CopyObjectCommand({ Bucket, Key: to, CopySource: source }));
    },
    size: async (key) => {
      try {
        const head = await client.send(new HeadObjectCommand({ Bucket, Key: key }));
        return head.ContentLength ?? 0;
      } catch (error) {
        if (statusOf(error) === 404) return null;
        throw error;
      }
    },
    read: async (key) => (await get(key)).body.transformToByteArray(),
    stream: async (key) => {
      const { body, sizeBytes } = await get(key);
      return { body: body.transformToWebStream(), sizeBytes };
    },
    delete: async (key) => {
      await client.send(new DeleteObjectCommand({ Bucket, Key: key }));
    },
    ready: async () => {
      try {
        await client.send(new HeadBucketCommand({ Bucket }), {
          abortSignal: AbortSignal.timeout(READY_TIMEOUT_MS),
        });
        return true;
      } catch {
        return false;
      }
    },
  };
}

/** What the storage answered with, or null where it did not answer. */
function statusOf(error: unknown): number | null {
  return error instanceof S3ServiceException ? (error.$metadata.httpStatusCode ?? null) : null;
}
