/**
 * Who may import whom: the table of DEVELOPERS.md, held against the imports that really stand in
 * the code (type imports too, as TypeScript's own scanner finds them).
 */
import { readdirSync, readFileSync } from "node:fs";
import { builtinModules } from "node:module";
import { dirname, join, normalize } from "node:path";
import ts from "typescript";
import { describe, expect, it } from "vitest";

const root = join(import.meta.dirname, "..");

interface SourceFile {
  /** From the project's root, with forward slashes. */
  path: string;
  text: string;
}

interface RoomRule {
  /** Rooms whose files may be imported. */
  rooms: readonly string[];
  /** npm packages that may be imported; "free" where the table names none. */
  packages: readonly RegExp[] | "free";
  /** Whether Node's own modules may be imported. */
  node: boolean;
}

const ENGINE_PACKAGES = [
  /^ml-matrix$/,
  /^ml-regression$/,
  /^fft\.js$/,
  /^papaparse$/,
  /^@stdlib\/stats-base-dists-[a-z-]+$/,
];

const RULES: Record<string, RoomRule> = {
  engine: { rooms: ["engine"], packages: ENGINE_PACKAGES, node: false },
  domain: { rooms: ["domain", "engine types"], packages: [/^zod$/], node: false },
  workers: {
    rooms: ["workers", "engine", "engine types"],
    packages: [/^comlink$/, /^hash-wasm$/, /^react$/],
    node: true,
  },
  db: {
    rooms: ["db", "domain", "engine types", "env"],
    packages: [/^drizzle-orm(\/|$)/, /^@libsql\/client(\/|$)/],
    node: true,
  },
  services: { rooms: ["services", "domain", "engine types", "env"], packages: "free", node: true },
  auth: {
    rooms: ["auth", "db", "services", "domain", "env"],
    packages: [
      /^remix-auth$/,
      /^remix-auth-form$/,
      /^@node-rs\/argon2$/,
      /^otplib$/,
      /^react-router$/,
      /^rate-limiter-flexible$/,
    ],
    node: true,
  },
  charts: {
    rooms: ["charts", "engine types"],
    packages: [/^react$/, /^react\/jsx-runtime$/, /^uplot$/, /^d3-[a-z]+$/],
    node: false,
  },
  components: {
    rooms: ["components", "charts", "domain", "engine types"],
    packages: "free",
    node: false,
  },
  workflows: {
    rooms: ["workflows", "db", "services", "domain", "engine", "engine types"],
    packages: "free",
    node: true,
  },
  routes: {
    rooms: [
      "routes",
      "engine",
      "engine types",
      "workers",
      "domain",
      "db",
      "services",
      "auth",
      "workflows",
      "charts",
      "components",
      "env",
      "app",
    ],
    packages: "free",
    node: true,
  },
  env: { rooms: ["domain"], packages: "free", node: true },
  app: {
    rooms: [
      "engine",
      "engine types",
      "workers",
      "domain",
      "db",
      "services",
      "auth",
      "workflows",
      "charts",
      "components",
      "env",
      "app",
    ],
    packages: "free",
    node: true,
  },
  scripts: {
    rooms: [
      "scripts",
      "fixtures",
      "engine",
      "engine types",
      "workers",
      "domain",
      "db",
      "services",
      "auth",
      "workflows",
      "charts",
      "components",
      "env",
      "app",
    ],
    packages: "free",
    node: true,
  },
};

/** The engine's files that are not a stage and that every stage may import. */
const ENGINE_COMMON = ["types", "errors", "math"];

function roomOf(path: string): string {
  if (path.startsWith("app/engine/types.ts") || path.startsWith("app/engine/errors.ts")) {
    return "engine types";
  }
  if (path.startsWith("app/env.server")) return "env";
  const inFolder = /^app\/([a-z]+)\//.exec(path);
  if (inFolder?.[1]) return inFolder[1];
  if (path.startsWith("app/")) return "app";
  return path.split("/")[0] ?? path;
}

/** The part of the engine that a file belongs to: a stage, `math`, `types`, `errors` or `pipeline`. */
function engineStage(path: string): string {
  return /^app\/engine\/([a-z]+)/.exec(path)?.[1] ?? "";
}

/** A project path for what lies in the project, else the package's name as written. */
function resolveImport(from: string, specifier: string): { path: string } | { package: string } {
  if (specifier.startsWith("#app/")) return { path: specifier.slice(1) };
  if (specifier.startsWith(".")) return { path: normalize(join(dirname(from), specifier)) };
  return { package: specifier };
}

function importsOf(file: SourceFile): string[] {
  return ts
    .preProcessFile(file.text, true, true)
    .importedFiles.map((found) => found.fileName.replace(/\?.*$/, ""));
}

/** One sentence for each import that breaks the table, and for each cycle. */
function findFaults(files: readonly SourceFile[]): string[] {
  const faults: string[] = [];
  const graph = new Map<string, string[]>();
  for (const file of files) {
    const room = roomOf(file.path) === "engine types" ? "engine" : roomOf(file.path);
    const rule = RULES[room];
    if (!rule) {
      faults.push(`${file.path} stands in no room of the table.`);
      continue;
    }
    const neighbours: string[] = [];
    graph.set(file.path, neighbours);
    for (const specifier of importsOf(file)) {
      const target = resolveImport(file.path, specifier);
      if ("package" in target) {
        faults.push(...packageFault(file.path, room, rule, target.package));
        continue;
      }
      if (target.path.includes("/+types/")) continue;
      neighbours.push(target.path);
      faults.push(...pathFault(file.path, room, rule, target.path));
    }
    if (/(^|\/)index\.tsx?$/.test(file.path)) faults.push(`${file.path} is a barrel by its name.`);
    if (/\/(utils|helpers|common)\//.test(file.path)) {
      faults.push(`${file.path} stands in a room without a subject.`);
    }
  }
  faults.push(...findCycles(graph));
  return faults;
}

function packageFault(path: string, room: string, rule: RoomRule, name: string): string[] {
  const isNode = name.startsWith("node:") || builtinModules.includes(name);
  if (isNode) return rule.node ? [] : [`${path}: ${room} may not import Node's ${name}.`];
  if (name === "uplot" || name.startsWith("uplot/")) {
    return room === "charts" ? [] : [`${path}: only charts may import uplot.`];
  }
  if (rule.packages === "free") return [];
  if (room === "workers" && name === "react" && !/\/use-[a-z-]+\.ts$/.test(path)) {
    return [`${path}: in workers only the hook may import react.`];
  }
  return rule.packages.some((allowed) => allowed.test(name))
    ? []
    : [`${path}: ${room} may not import the package ${name}.`];
}

function pathFault(path: string, room: string, rule: RoomRule, target: string): string[] {
  if (/\.(css|svg|json|woff2)$/.test(target)) return [];
  const targetRoom = roomOf(target);
  if (targetRoom === "routes") {
    return [`${path}: nothing may import the route ${target}.`];
  }
  if (room === "engine") {
    if (targetRoom !== "engine" && targetRoom !== "engine types") {
      return [`${path}: the engine may not import ${target}.`];
    }
    const from = engineStage(path);
    const to = engineStage(target);
    const allowed = from === "pipeline" || from === to || ENGINE_COMMON.includes(to);
    return allowed ? [] : [`${path}: the stage ${from} may not import ${to} (${target}).`];
  }
  return rule.rooms.includes(targetRoom)
    ? []
    : [`${path}: ${room} may not import ${targetRoom} (${target}).`];
}

function findCycles(graph: ReadonlyMap<string, readonly string[]>): string[] {
  const faults: string[] = [];
  const done = new Set<string>();
  const visit = (node: string, trail: string[]) => {
    const at = trail.indexOf(node);
    if (at >= 0) {
      faults.push(`A cycle: ${[...trail.slice(at), node].join(" → ")}.`);
      return;
    }
    if (done.has(node)) return;
    for (const next of graph.get(node) ?? []) visit(next, [...trail, node]);
    done.add(node);
  };
  for (const node of graph.keys()) visit(node, []);
  return faults;
}

function projectFiles(): SourceFile[] {
  return ["app", "scripts"]
    .flatMap((folder) =>
      readdirSync(join(root, folder), { recursive: true, encoding: "utf8" }).map(
        (path) => `${folder}/${path.replaceAll("\\", "/")}`,
      ),
    )
    .filter((path) => /\.tsx?$/.test(path) && !/\.(test\.tsx?|d\.ts)$/.test(path))
    .map((path) => ({ path, text: readFileSync(join(root, path), "utf8") }));
}

describe("who may import whom", () => {
  it("holds for every file of the project", () => {
    const files = projectFiles();
    expect(files.length).toBeGreaterThan(50);
    expect(findFaults(files)).toEqual([]);
  });

  it.each([
    ["app/engine/fit/a.ts", 'import { x } from "../pool/b.ts";', "stage fit may not import pool"],
    ["app/engine/fit/a.ts", 'import fs from "node:fs";', "engine may not import Node's node:fs"],
    ["app/engine/fit/a.ts", 'import { z } from "zod";', "engine may not import the package zod"],
    [
      "app/engine/fit/a.ts",
      'import type { T } from "#app/domain/fit.ts";',
      "engine may not import",
    ],
    [
      "app/domain/a.ts",
      'import { x } from "#app/db/client.server.ts";',
      "domain may not import db",
    ],
    [
      "app/domain/a.ts",
      'import { x } from "#app/engine/pipeline.ts";',
      "domain may not import engine",
    ],
    [
      "app/components/a.tsx",
      'import { x } from "../db/schema.ts";',
      "components may not import db",
    ],
    ["app/components/a.tsx", 'import uPlot from "uplot";', "only charts may import uplot"],
    [
      "app/workflows/a.ts",
      'const x = await import("#app/routes/home/home.tsx");',
      "nothing may import the route",
    ],
    ["app/routes/a/a.tsx", 'export { x } from "../b/b.tsx";', "nothing may import the route"],
    [
      "app/workers/engine.worker.ts",
      'import { useState } from "react";',
      "only the hook may import react",
    ],
    [
      "app/services/a.ts",
      'import { x } from "#app/db/client.server.ts";',
      "services may not import db",
    ],
    ["app/helpers/a.ts", "", "stands in no room"],
    ["app/domain/utils/a.ts", "", "room without a subject"],
    ["app/domain/index.ts", "", "barrel"],
  ])("finds the fault in a sample: %s with %s", (path, text, fault) => {
    expect(findFaults([{ path, text }]).join("\n")).toContain(fault);
  });

  it("finds a cycle in a sample", () => {
    const faults = findFaults([
      { path: "app/domain/a.ts", text: 'import { b } from "./b.ts";' },
      { path: "app/domain/b.ts", text: 'import { a } from "#app/domain/a.ts";' },
    ]);
    expect(faults).toEqual(["A cycle: app/domain/a.ts → app/domain/b.ts → app/domain/a.ts."]);
  });

  it("lets a permitted import through", () => {
    const faults = findFaults([
      { path: "app/engine/fit/a.ts", text: 'import { x } from "../math/b.ts";' },
      { path: "app/engine/pipeline.ts", text: 'import { x } from "./fit/a.ts";' },
      { path: "app/workers/use-engine.ts", text: 'import { useState } from "react";' },
    ]);
    expect(faults).toEqual([]);
  });
});
