import { reactRouter } from "@react-router/dev/vite";
import tailwindcss from "@tailwindcss/vite";
import { defineConfig } from "vite";

export default defineConfig({
  plugins: [tailwindcss(), !process.env.VITEST && reactRouter()],
  // A small woff2 turned into a data: address would break font-src.
  build: { assetsInlineLimit: 0 },
  environments: { ssr: { build: { rollupOptions: { input: "./app/server.ts" } } } },
  worker: { format: "es" },
  optimizeDeps: {
    include: [
      "react",
      "react-dom",
      "react-router",
      "react-router/dom",
      "comlink",
      "uplot",
      "ml-matrix",
      "fft.js",
      "papaparse",
    ],
    exclude: [
      "@libsql/client",
      "@node-rs/argon2",
      "drizzle-orm",
      "remix-auth",
      "remix-auth-form",
      "@aws-sdk/client-s3",
    ],
  },
});
