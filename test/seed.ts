/** Property tests draw from one seed, so that a run can be made again; FUZZ_SEED sets another. */
import fc from "fast-check";

fc.configureGlobal({ seed: Number(process.env["FUZZ_SEED"] ?? 20310304) });
