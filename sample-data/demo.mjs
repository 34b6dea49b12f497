// `npm run demo`: makes sure the tool is built, cleans the sample logs with every sample pipeline, and prints
// where the reports are.
import { spawnSync } from "node:child_process";
import { existsSync, readdirSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const root = join(dirname(fileURLToPath(import.meta.url)), "..");
const bin = join(root, "dist", "bin.js");
if (!existsSync(bin)) {
  const built = spawnSync("npm", ["run", "build"], { cwd: root, stdio: "inherit" });
  if (built.status !== 0) process.exit(built.status ?? 1);
}
let worst = 0;
for (const file of readdirSync(join(root, "pipelines"))
  .filter((f) => /\.ya?ml$/.test(f))
  .sort()) {
  const run = spawnSync(process.execPath, [bin, "clean", join("pipelines", file)], {
    cwd: root,
    stdio: ["ignore", "inherit", "inherit"],
  });
  worst = Math.max(worst, run.status ?? 1);
  process.stdout.write("\n");
}
process.stdout.write(
  worst === 0
    ? "All sample logs are cleaned. Open the reports named above in a browser.\n"
    : `Something was not as it should be (exit code ${worst}); see above.\n`,
);
process.exitCode = worst;
