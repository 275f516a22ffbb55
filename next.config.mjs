/** @type {import("next").NextConfig} */
const config = {
  distDir: process.env.TRIMWRIGHT_DIST_DIR ?? ".next",
  outputFileTracingRoot: import.meta.dirname,
  turbopack: { root: import.meta.dirname },
  serverExternalPackages: ["pg", "pg-boss", "@node-rs/argon2", "pino"],
  poweredByHeader: false,
  // Types are checked by `npm run check` with the same compiler and stricter scope; doing it again would double the build's time.
  typescript: { ignoreBuildErrors: true },
  experimental: { serverActions: { bodySizeLimit: "1mb" } },
};

export default config;
