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
