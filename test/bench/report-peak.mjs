// Preloaded into a measured process: writes its peak resident set (kB) to the file named in PEAK_FILE.
import { writeFileSync } from "node:fs";

process.on("exit", () => writeFileSync(process.env.PEAK_FILE, String(process.resourceUsage().maxRSS)));
