/** A storage on this machine that speaks S3, for the demo and the tests. */
import { mkdirSync } from "node:fs";
import S3rver from "s3rver";

export const BUCKET = "ogee";
/** The fake takes any caller that names these. */
export const FAKE_KEYS = { accessKeyId: "S3RVER", secretAccessKey: "S3RVER" };

export interface StorageFake {
  endpoint: string;
  stop(): Promise<void>;
}

/** Browsers of `pageOrigin` may put parts and read the ETag of what they put. */
export async function startStorageFake(options: {
  directory: string;
  port: number;
  pageOrigin: string;
}): Promise<StorageFake> {
  mkdirSync(options.directory, { recursive: true });
  const cors = `<CORSConfiguration><CORSRule><AllowedOrigin>${options.pageOrigin}</AllowedOrigin><AllowedMethod>PUT</AllowedMethod><AllowedHeader>*</AllowedHeader><ExposeHeader>ETag</ExposeHeader></CORSRule></CORSConfiguration>`;
  const fake = new S3rver({
    address: "127.0.0.1",
    port: options.port,
    directory: options.directory,
    silent: true,
    configureBuckets: [{ name: BUCKET, configs: [Buffer.from(cors)] }],
  });
  const address = await fake.run();
  return {
    endpoint: `http://127.0.0.1:${address.port}`,
    stop: () => fake.close(),
  };
}
