/** `forebay schema`: the JSON Schema of the pipeline file, for editors, or of the account. */
import { pipelineJsonSchema, type StageSchemas } from "../pipeline/schema.ts";
import { accountJsonSchema } from "../report/account-schema.ts";
import { STAGES } from "../stages/registry.ts";
import { DONE } from "./exit-codes.ts";

/** JSON Schema, draft 2020-12, in stable order. */
export function schemaText(stages: StageSchemas): string {
  return `${JSON.stringify(pipelineJsonSchema(stages), null, 2)}\n`;
}

export function schemaCommand(
  options: { readonly account?: boolean },
  streams: { out(text: string): void },
): number {
  streams.out(
    options.account === true ? `${JSON.stringify(accountJsonSchema(), null, 2)}\n` : schemaText(STAGES),
  );
  return DONE;
}
