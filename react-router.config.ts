import type { Config } from "@react-router/dev/config";

export default {
  ssr: true,
  // The list of routes is small. Asked for later, it would be missing when the connection is.
  routeDiscovery: { mode: "initial" },
  future: {
    v8_middleware: true,
    v8_passThroughRequests: true,
    v8_splitRouteModules: true,
    v8_trailingSlashAwareDataRequests: true,
    v8_viteEnvironmentApi: true,
  },
} satisfies Config;
