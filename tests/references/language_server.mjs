// Holds what the language server sent against JSON Schemas made from the protocol's own TypeScript types.
//
// usage: node language_server.mjs RECORD MODULES [--break]
//
// RECORD is what language_server.py wrote: one message a line with the method that it belongs to. MODULES is a
// folder node_modules with vscode-languageserver-protocol (the types), ts-json-schema-generator (types to schemas) and
// ajv (the check). No member may be there that the types do not know; `uinteger` and `integer` are numbers in TypeScript
// and are checked as what they say. Every kind of message that the server may send must be in the record.
//
// With --break every message is spoilt in two ways, by a member that nobody knows and by a number as a string, and
// each of these must be noticed.

import { readFileSync, writeFileSync, mkdtempSync, rmSync } from "node:fs";
import { createRequire } from "node:module";
import { join, resolve } from "node:path";

const [record, modules, mode] = process.argv.slice(2);
const require = createRequire(join(resolve(modules), "-"));
const { createGenerator } = require("ts-json-schema-generator");
const Ajv = require("ajv").default ?? require("ajv");

// What a method answers, or what its own messages hold, in the names of the protocol's types.
const ANSWERS = {
  "initialize": "InitializeResult",
  "shutdown": "null",
  "textDocument/hover": "Hover | null",
  "textDocument/documentHighlight": "DocumentHighlight[] | null",
  "textDocument/definition": "Definition | DefinitionLink[] | null",
  "textDocument/references": "Location[] | null",
  "textDocument/completion": "CompletionItem[] | CompletionList | null",
  "textDocument/codeAction": "(Command | CodeAction)[] | null",
  "textDocument/prepareRename": "PrepareRenameResult | null",
  "textDocument/rename": "WorkspaceEdit | null",
  "textDocument/semanticTokens/full": "SemanticTokens | null",
  "textDocument/semanticTokens/range": "SemanticTokens | null",
  "textDocument/inlayHint": "InlayHint[] | null",
  "textDocument/codeLens": "CodeLens[] | null",
  "textDocument/documentSymbol": "DocumentSymbol[] | SymbolInformation[] | null",
  "textDocument/foldingRange": "FoldingRange[] | null",
  "textDocument/selectionRange": "SelectionRange[] | null",
  "workspace/symbol": "SymbolInformation[] | WorkspaceSymbol[] | null",
  "textDocument/diagnostic": "DocumentDiagnosticReport",
  "workspace/diagnostic": "WorkspaceDiagnosticReport",
};
const OWN = {
  "textDocument/publishDiagnostics": "PublishDiagnosticsParams",
  "client/registerCapability": "RegistrationParams",
  "workspace/configuration": "ConfigurationParams",
  "workspace/applyEdit": "ApplyWorkspaceEditParams",
  "workspace/codeLens/refresh": null,
};
// Sent only where something lasts, goes wrong, or changes late; checked when they come.
const RARE = {
  "workspace/inlayHint/refresh": null,
  "workspace/diagnostic/refresh": null,
  "window/logMessage": "LogMessageParams",
  "window/showMessage": "ShowMessageParams",
  "window/workDoneProgress/create": "WorkDoneProgressCreateParams",
};

function schemas() {
  const folder = mkdtempSync(join(resolve(modules), "schemas-"));
  try {
    const file = join(folder, "messages.ts");
    const types = [...Object.entries(ANSWERS), ...Object.entries(OWN), ...Object.entries(RARE)].filter(([, type]) => type);
    const names = new Map(types.map(([method, type]) => [method, [`Of_${method.replaceAll("/", "_")}`, type]]));
    const used = new Set(types.flatMap(([, type]) => type.match(/[A-Z]\w+/g) ?? []));
    const lines = [`import { ${[...used].join(", ")} } from "vscode-languageserver-protocol";`];
    for (const [name, type] of names.values()) lines.push(`export type ${name} = ${type};`);
    writeFileSync(file, lines.join("\n"));
    const options = { strict: true, moduleResolution: "node", module: "commonjs", target: "es2020", skipLibCheck: true };
    const tsconfig = join(folder, "tsconfig.json");
    writeFileSync(tsconfig, JSON.stringify({ compilerOptions: options, files: [file] }));
    const generator = createGenerator({ path: file, tsconfig, type: "*", expose: "all", additionalProperties: false });
    const schema = generator.createSchema("*");
    const known = schema.definitions;
    known.uinteger = { type: "integer", minimum: 0, maximum: 2147483647 };
    known.integer = { type: "integer", minimum: -2147483648, maximum: 2147483647 };
    const ajv = new Ajv({ strict: false, allowUnionTypes: true, formats: {} });
    ajv.addSchema(schema, "protocol");
    return new Map([...names].map(([method, [name]]) => [method, ajv.compile({ $ref: `protocol#/definitions/${name}` })]));
  } finally {
    rmSync(folder, { recursive: true });
  }
}

// What is wrong with the shape of JSON-RPC itself.
function envelope({ own, message }) {
  if (message.jsonrpc !== "2.0") return "no version of JSON-RPC";
  const fields = Object.keys(message).sort().join(" ");
  const allowed = own
    ? ["jsonrpc method params", "id jsonrpc method params", "id jsonrpc method"]
    : ["id jsonrpc result", "error id jsonrpc"];
  return allowed.includes(fields) ? null : `members ${fields}`;
}

// The part of a message that has a type, with a way to put another one there.
function wrong(checks, entry) {
  const broken = envelope(entry);
  if (broken) return broken;
  const { own, method, message } = entry;
  if (message.error) {
    const { code, message: words } = message.error;
    return Number.isInteger(code) && typeof words === "string" ? null : "an error without code or message";
  }
  const check = checks.get(method);
  if (!check) return own && method in { ...OWN, ...RARE } || !own ? null : `an unknown message ${method}`;
  return check(own ? message.params : message.result) ? null : JSON.stringify(check.errors.slice(0, 3));
}

// Every object of a value, and every number with what holds it.
function* places(value) {
  if (Array.isArray(value)) for (const one of value) yield* places(one);
  else if (value && typeof value === "object") {
    yield value;
    // Data of ours is nobody's business.
    for (const [key, one] of Object.entries(value)) {
      if (!["data", "arguments", "registerOptions"].includes(key)) yield* places(one);
    }
  }
}

function spoilings(entry) {
  const spoilt = [];
  const typed = (copy) => (entry.own ? copy.message.params : copy.message.result);
  const count = [...places(typed(entry))].length;
  // What `initialize` answers may have members of any name at its top.
  const first = entry.method === "initialize" ? 1 : 0;
  for (const at of new Set([first, count - 1].filter((at) => at >= 0 && at < count))) {
    const copy = structuredClone(entry);
    [...places(typed(copy))][at].nobodyKnows = 1;
    spoilt.push(copy);
  }
  const copy = structuredClone(entry);
  for (const place of places(typed(copy))) {
    const key = Object.keys(place).find((key) => typeof place[key] === "number" && key !== "code" && key !== "token");
    if (key) {
      place[key] = String(place[key]);
      spoilt.push(copy);
      break;
    }
  }
  return spoilt;
}

const checks = schemas();
const entries = readFileSync(record, "utf8").trim().split("\n").map((line) => JSON.parse(line));
let failures = 0;
const fail = (words) => {
  failures += 1;
  if (failures <= 10) console.log(words);
};
if (mode === "--break") {
  let noticed = 0;
  for (const entry of entries.filter(({ method }) => checks.has(method))) {
    for (const spoilt of spoilings(entry)) {
      if (wrong(checks, spoilt)) noticed += 1;
      else fail(`not noticed: ${JSON.stringify(spoilt).slice(0, 400)}`);
    }
  }
  console.log(`${noticed} spoilt messages noticed, ${failures} not`);
  if (noticed === 0) failures += 1;
} else {
  for (const entry of entries) {
    const cause = wrong(checks, entry);
    if (cause) fail(`${entry.method}: ${cause}: ${JSON.stringify(entry.message).slice(0, 400)}`);
  }
  const seen = new Set(entries.map(({ method }) => method));
  for (const method of [...Object.keys(ANSWERS), ...Object.keys(OWN)]) if (!seen.has(method)) fail(`never sent: ${method}`);
  console.log(`${entries.length} messages held against the types of the protocol, ${failures} wrong`);
}
process.exit(failures ? 1 : 0);
