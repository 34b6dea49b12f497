/** `forebay stages`: the stages, or the settings of one, from the schemas that read them. */
import type { z } from "zod";
import { nearestName, quoted } from "../diagnostics.ts";
import { isNeeded, settingsOf } from "../pipeline/describe-schema.ts";
import type { StageSchema, StageSchemas } from "../pipeline/schema.ts";
import { STAGES } from "../stages/registry.ts";
import { DONE, WRONG } from "./exit-codes.ts";
import { wrap } from "./text.ts";

/** All stages with a sentence each, or one stage with its settings; null when there is no such stage. */
export function stagesText(stages: StageSchemas, name?: string, width = 80): string | null {
  if (name !== undefined) {
    const stage = stages.get(name);
    return stage === undefined ? null : stageText(stage, width);
  }
  const column = Math.max(...[...stages.keys()].map((n) => n.length)) + 2;
  const lines = [...stages.values()].map((stage) =>
    wrap(`${stage.name.padEnd(column)}${stage.about}`, width, " ".repeat(column)),
  );
  return `${lines.join("\n")}\n\nforebay stages NAME describes the settings of one.\n`;
}

function stageText(stage: StageSchema, width: number): string {
  const settings = settingsOf(stage.settings as z.ZodObject).map(({ key, schema, facts, about }) => {
    const rest =
      facts?.default !== undefined
        ? `default ${facts.default}`
        : isNeeded(schema)
          ? "required"
          : "may be left out";
    return [
      indented(`${key}: ${facts?.kind ?? "mapping"}; ${rest}`, 2, width),
      ...(about === undefined ? [] : [indented(about, 4, width)]),
      ...(facts === undefined ? [] : [indented(`Allowed: ${facts.allowed}.`, 4, width)]),
    ].join("\n");
  });
  return `${wrap(`${stage.name}: ${stage.about}`, width)}\n\n${settings.join("\n\n")}\n`;
}

function indented(text: string, by: number, width: number): string {
  return wrap(text, width - by).replace(/^/gm, " ".repeat(by));
}

export function stagesCommand(
  name: string | undefined,
  streams: { out(text: string): void; err(text: string): void },
): number {
  const text = stagesText(STAGES, name);
  if (text !== null) {
    streams.out(text);
    return DONE;
  }
  const names = [...STAGES.keys()];
  const near = nearestName(name!, names);
  streams.err(
    [
      `there is no stage ${quoted(name!)}`,
      `  given    ${quoted(name!)}`,
      `  allowed  ${names.join(", ")}`,
      `  do       ${near === undefined ? "choose one of them" : `forebay stages ${near}`}`,
      "",
    ].join("\n"),
  );
  return WRONG;
}
