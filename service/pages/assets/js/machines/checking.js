// What can be seen to be wrong here, as it is typed: needed fields, kinds, ranges, forms, and the rules between fields that
// the schema can say. The service checks everything again.
import { text } from "../texts.js";
import { askedOf } from "./conditions.js";
import { numberFault } from "./ranges.js";
import { chosenOf, fieldsOf, itemOf, namedOf } from "./shapes.js";

const worded = (name, values) => text(`movements.${name}`, values);
const isObject = (value) => value !== null && typeof value === "object" && !Array.isArray(value);
const isWorth = (shape, value) =>
  shape.takesWorth && isObject(value) && "value" in value && Object.keys(value).every((name) => name in shape.worth);
const seen = (value) => (typeof value === "string" ? value : JSON.stringify(value));

// Every fault of a value, each { path, why }; `units` are those of fields by their names, where they are told.
export function faultsOf(shape, value, units = {}, path = []) {
  if (value === null && shape.takesNull) return [];
  if (isWorth(shape, value)) return worthFaults(shape, value, units, path);
  const judge = { fields: inFields, named: inNamed, list: inList, row: inList, either: inEither }[shape.kind];
  if (judge) return judge(shape, value, units, path);
  const why = leafFault(shape, value, unitOf(units, path));
  return why ? [{ path, why }] : [];
}

const unitOf = (units, path) => units[path.findLast((part) => typeof part === "string")];

function worthFaults(shape, worth, units, path) {
  const unit = unitOf(units, path);
  const found = [{ path, why: leafFault(shape, worth.value, unit) }];
  if ("plus_minus" in worth) found.push({ path: [...path, "plus_minus"], why: numberFault(shape.worth.plus_minus, worth.plus_minus, { unit }) });
  const bases = shape.worth.basis.enum;
  if ("basis" in worth && !bases.includes(worth.basis)) {
    found.push({ path: [...path, "basis"], why: worded("fault_choice", { seen: seen(worth.basis), choices: bases.join(", ") }) });
  }
  return found.filter(({ why }) => why);
}

function inFields(shape, value, units, path) {
  if (!isObject(value)) return [{ path, why: worded("fault_object") }];
  const known = fieldsOf(shape);
  const strange = Object.keys(value).filter((name) => !known.some((field) => field.name === name));
  const found = strange.map((name) => ({ path: [...path, name], why: worded("fault_unknown") }));
  const asked = askedOf(shape.schema, value);
  for (const { name, shape: own, needed } of known) {
    const here = [...path, name];
    if (name in value) found.push(...faultsOf(own, value[name], units, here));
    if ((needed && !(name in value)) || asked.needed.includes(name)) found.push({ path: here, why: worded("fault_needed") });
  }
  for (const name of asked.apart) found.push({ path: [...path, name], why: worded("fault_apart") });
  for (const [name, only] of asked.fixed) found.push({ path: [...path, name], why: worded("fault_choice", { seen: seen(value[name]), choices: only }) });
  return found;
}

function inNamed(shape, value, units, path) {
  if (!isObject(value)) return [{ path, why: worded("fault_object") }];
  const names = shape.schema.propertyNames?.enum;
  const strange = Object.keys(value).filter((name) => names && !names.includes(name));
  const found = strange.map((name) => ({ path: [...path, name], why: worded("fault_choice", { seen: name, choices: names.join(", ") }) }));
  return [...found, ...Object.entries(value).flatMap(([name, one]) => faultsOf(namedOf(shape), one, units, [...path, name]))];
}

function inList(shape, value, units, path) {
  if (!Array.isArray(value)) return [{ path, why: worded("fault_list") }];
  const { minItems: least = 0, maxItems: most = Infinity } = shape.schema;
  const found = value.slice(0, most).flatMap((one, place) => faultsOf(itemOf(shape, place), one, units, [...path, place]));
  if (value.length < least) found.push({ path, why: worded("fault_few", { least, seen: value.length }) });
  if (value.length > most) found.push({ path, why: worded("fault_many", { most, seen: value.length }) });
  return found;
}

const inEither = (shape, value, units, path) => faultsOf(chosenOf(shape, value), value, units, path);

function leafFault({ schema, kind }, value, unit) {
  if (value === "" || value === undefined) return worded("fault_needed");
  if (kind === "number" || kind === "whole") return numberFault(schema, value, { unit, isWhole: kind === "whole" });
  if (kind === "yes-no") return typeof value === "boolean" ? null : worded("fault_yes_no", { seen: seen(value) });
  const choices = kind === "fixed" ? [schema.const] : kind === "choice" ? schema.enum : null;
  if (choices) return choices.includes(value) ? null : worded("fault_choice", { seen: seen(value), choices: choices.join(", ") });
  if (typeof value !== "string") return worded("fault_text");
  if ([...value].length > (schema.maxLength ?? Infinity)) return worded("fault_long", { most: schema.maxLength });
  if (schema.pattern && !new RegExp(schema.pattern, "u").test(value)) return patternFault(schema, value);
  return null;
}

// A form that people cannot read is told by an example where there is one.
function patternFault(schema, value) {
  const [example] = schema.examples ?? [];
  const wanted = example === undefined ? schema.pattern : schema.examples.join(", ");
  return worded(example === undefined ? "fault_pattern" : "fault_like", { seen: value, wanted });
}
