import { index, layout, type RouteConfig, route } from "@react-router/dev/routes";

export default [
  route("sign-in", "routes/account/sign-in.tsx"),
  route("sign-out", "routes/account/sign-out.ts"),
  route("choose-lab", "routes/account/choose-lab.tsx"),
  route("preferences", "routes/account/preferences.ts"),
  route("health", "routes/health/health.ts"),
  route("ready", "routes/health/ready.ts"),

  layout("routes/lab/shell.tsx", [
    index("routes/home/home.tsx"),
    route("studies", "routes/studies/list.tsx"),
    route("studies/new", "routes/studies/new.tsx"),
    route("studies/:id", "routes/studies/study.tsx"),
    route("studies/:id/set-up", "routes/studies/set-up.tsx"),
    route("studies/:id/recordings", "routes/studies/recordings.tsx"),
    route("studies/:id/protocols", "routes/studies/protocols.tsx"),
    route("studies/:id/take-in", "routes/recordings/take-in.tsx"),
    route("recordings/:id", "routes/recordings/recording.tsx"),
    route("fits/:id", "routes/fits/fit.tsx"),
    route("reviews", "routes/reviews/queue.tsx"),
    route("*", "routes/lab/missing.tsx"),
  ]),

  // Resource routes: data for scripts of our own pages, and downloads.
  route("studies/:id/uploads", "routes/recordings/open-upload.ts"),
  route("uploads/:id/finish", "routes/recordings/finish-upload.ts"),
  route("uploads/:id/cancel", "routes/recordings/cancel-upload.ts"),
  route("recordings/:id/raw", "routes/recordings/raw.ts"),
  route("fits/:id/:document", "routes/fits/document.ts"),
] satisfies RouteConfig;
