/** Builds once before all tests: the command line is tested as it ships. */
import { execSync } from "node:child_process";

export default function build(): void {
  execSync("npx tsc -p tsconfig.build.json", { stdio: "inherit" });
}
