/** `forebay schema`: the JSON Schema of the pipeline file, for editors. */
import { pipelineJsonSchema, type StageSchemas } from "../pipeline/schema.ts";
import { STAGES } from "../stages/registry.ts";
import { DONE } from "./exit-codes.ts";

/** JSON Schema, draft 2020-12, in stable order. */
export function schemaText(stages: StageSchemas): string {
  return `${JSON.stringify(pipelineJsonSchema(stages), null, 2)}\n`;
}

export function schemaCommand(streams: { out(text: string): void }): number {
  streams.out(schemaText(STAGES));
  return DONE;
}
