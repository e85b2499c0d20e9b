import { defineConfig } from "vitest/config";

process.env.VITEST = "true";

export default defineConfig({
  test: {
    projects: [
      {
        extends: true,
        test: {
          name: "node",
          environment: "node",
          include: ["app/**/*.test.ts", "tests/**/*.test.ts", "scripts/**/*.test.ts"],
          exclude: ["tests/e2e/**"],
        },
      },
      {
        extends: true,
        test: {
          name: "page",
          environment: "happy-dom",
          include: ["app/**/*.test.tsx"],
        },
      },
    ],
  },
});
