// What a field may hold, read from the JSON Schema that the service publishes: one plain description for each field.
const STATED = "value";

function resolved(schema, root) {
  return schema.$ref ? root.$defs[schema.$ref.split("/").pop()] : schema;
}

// The choices of a field that are not null, and whether null, or nothing at all, is one of them.
function choicesOf(schema, root) {
  const listed = schema.anyOf ?? schema.oneOf ?? [schema];
  const choices = listed.map((one) => resolved(one, root)).filter((one) => one.type !== "null");
  return { choices, takesNull: choices.length < listed.length };
}

const isStated = (schema) => schema.type === "object" && STATED in (schema.properties ?? {}) && "plus_minus" in schema.properties;

function kindOf(schema) {
  if (schema.const !== undefined) return "fixed";
  if (schema.enum) return "choice";
  if (schema.type === "object") return schema.properties ? "fields" : "named";
  if (schema.type === "array") return schema.prefixItems ? "row" : "list";
  return { string: "text", integer: "whole", number: "number", boolean: "yes-no" }[schema.type];
}

// { kind, schema, root, byDefault, takesNull, takesWorth?, worth?, choices? }; kind is one of fixed, choice, fields, named, row,
// list, text, whole, number, yes-no, either.
export function shapeOf(schema, root) {
  const outer = resolved(schema, root);
  const { choices, takesNull } = choicesOf(outer, root);
  const told = { root, byDefault: schema.default ?? outer.default, takesNull };
  const stated = choices.find(isStated);
  const takesWorth = stated !== undefined;
  const plain = choices.filter((one) => !isStated(one));
  if (plain.length > 1) return { ...told, kind: "either", choices: plain.map((one) => shapeOf(one, root)) };
  return { ...told, kind: kindOf(plain[0]), schema: plain[0], takesWorth, worth: stated?.properties };
}

export const fieldsOf = (shape) =>
  Object.entries(shape.schema.properties).map(([name, schema]) => ({
    name,
    shape: shapeOf(schema, shape.root),
    needed: (shape.schema.required ?? []).includes(name),
  }));

export const itemOf = (shape, place = 0) =>
  shapeOf(shape.kind === "row" ? shape.schema.prefixItems[place] : shape.schema.items, shape.root);

export const namedOf = (shape) => shapeOf(shape.schema.additionalProperties, shape.root);

// Which of the choices a value is: the one most of whose fields it has.
export function chosenOf(shape, value) {
  if (Array.isArray(value)) return shape.choices.find((one) => one.kind === "list") ?? shape.choices[0];
  const names = Object.keys(value ?? {});
  const fit = (one) => (one.kind === "fields" ? names.filter((name) => name in one.schema.properties).length : -1);
  const strange = (one) => (one.kind === "fields" ? names.filter((name) => !(name in one.schema.properties)).length : 0);
  return [...shape.choices].sort((one, other) => strange(one) - strange(other) || fit(other) - fit(one))[0];
}

// What a field holds when it is begun.
export function begun(shape) {
  if (shape.kind === "fields") {
    const fixed = fieldsOf(shape).filter((field) => field.shape.kind === "fixed");
    return Object.fromEntries(fixed.map((field) => [field.name, field.shape.schema.const]));
  }
  if (shape.kind === "row") return structuredClone(shape.byDefault ?? shape.schema.prefixItems.map(() => ""));
  if (shape.kind === "list") return [];
  if (shape.kind === "named") return {};
  if (shape.kind === "either") return begun(shape.choices[0]);
  return "";
}

// Whether a part holds single values alone, so that a list of such parts is a table.
export const isFlat = (shape) => shape.kind === "fields" && fieldsOf(shape).every((field) => !isGroup(field.shape));

export const isGroup = (shape) => ["fields", "named", "row", "list", "either"].includes(shape.kind);
