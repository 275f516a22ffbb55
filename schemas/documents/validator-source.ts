import { Ajv2020 } from "ajv/dist/2020";
import standalone from "ajv/dist/standalone";
import layoutSchema from "@/schemas/documents/layout.schema.json";

/** The schema's compiler: strict, so that a slip in the schema itself is an error, and every problem at once. */
export function schemaCompiler(): Ajv2020 {
  return new Ajv2020({ strict: true, allErrors: true, allowUnionTypes: true, code: { source: true, esm: true } });
}

/**
 * The layout schema compiled by ajv to a module without `eval`, which the browser's content security policy forbids. Written
 * by `npm run codegen` to `layout-validator.generated.ts`; a test holds the two together.
 */
export function layoutValidatorSource(): string {
  const ajv = schemaCompiler();
  const compile = (standalone as unknown as { default?: typeof standalone }).default ?? standalone;
  const code = (compile as typeof standalone)(ajv, ajv.compile(layoutSchema));
  const runtimes = [
    ...new Set([...code.matchAll(/require\("(ajv\/dist\/runtime\/\w+)"\)\.default/g)].map((m) => m[1] as string)),
  ];
  const nameOf = (path: string) => `runtime_${path.split("/").at(-1)}`;
  const imports = runtimes.map((path) => `import ${nameOf(path)}_module from "${path}.js";`);
  const unwrapped = runtimes.map(
    (path) => `const ${nameOf(path)} = ${nameOf(path)}_module.default ?? ${nameOf(path)}_module;`,
  );
  const body = runtimes.reduce((text, path) => text.replaceAll(`require("${path}").default`, nameOf(path)), code);
  const head = "// @ts-nocheck\n// Made by `npm run codegen` from layout.schema.json; do not edit.";
  return `${[head, ...imports, ...unwrapped, body.replace(/^"use strict";/, "").replace(/;function /g, ";\nfunction ")].join("\n")}\n`;
}
