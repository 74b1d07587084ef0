// What can be seen to be wrong here, as it is typed: needed fields, kinds, ranges, forms. Rules between fields are the
// service's, which checks everything again when the document is saved.
import { text } from "../texts.js";
import { chosenOf, fieldsOf, itemOf, namedOf } from "./shapes.js";

const worded = (name, values) => text(`movements.${name}`, values);
const isObject = (value) => value !== null && typeof value === "object" && !Array.isArray(value);
const isWorth = (shape, value) =>
  shape.takesWorth && isObject(value) && Object.keys(value).every((name) => ["value", "plus_minus", "basis"].includes(name));

export function faultsOf(shape, value, path = []) {
  if (value === null && shape.takesNull) return [];
  if (isWorth(shape, value)) return worthFaults(shape, value, path);
  const judge = { fields: inFields, named: inNamed, list: inList, row: inList, either: inEither }[shape.kind];
  if (judge) return judge(shape, value, path);
  const why = leafFault(shape, value);
  return why ? [{ path, why }] : [];
}

function worthFaults(shape, worth, path) {
  const found = [];
  const why = leafFault(shape, worth.value);
  if (why) found.push({ path, why });
  if ("plus_minus" in worth) {
    const off = numberFault({ minimum: 0 }, worth.plus_minus);
    if (off) found.push({ path: [...path, "plus_minus"], why: off });
  }
  return found;
}

function inFields(shape, value, path) {
  if (!isObject(value)) return [{ path, why: worded("fault_object") }];
  const known = fieldsOf(shape);
  const strange = Object.keys(value).filter((name) => !known.some((field) => field.name === name));
  const found = strange.map((name) => ({ path: [...path, name], why: worded("fault_unknown") }));
  for (const { name, shape: own, needed } of known) {
    const here = [...path, name];
    if (name in value) found.push(...faultsOf(own, value[name], here));
    else if (needed) found.push({ path: here, why: worded("fault_needed") });
  }
  return found;
}

function inNamed(shape, value, path) {
  if (!isObject(value)) return [{ path, why: worded("fault_object") }];
  return Object.entries(value).flatMap(([name, one]) => faultsOf(namedOf(shape), one, [...path, name]));
}

function inList(shape, value, path) {
  if (!Array.isArray(value)) return [{ path, why: worded("fault_list") }];
  const { minItems: least = 0, maxItems: most = Infinity } = shape.schema;
  const found = value.slice(0, most).flatMap((one, place) => faultsOf(itemOf(shape, place), one, [...path, place]));
  if (value.length < least) found.push({ path, why: worded("fault_few", { least }) });
  if (value.length > most) found.push({ path, why: worded("fault_many", { most }) });
  return found;
}

const inEither = (shape, value, path) => faultsOf(chosenOf(shape, value), value, path);

function leafFault(shape, value) {
  const { schema, kind } = shape;
  if (value === "" || value === undefined) return worded("fault_needed");
  if (kind === "number") return numberFault(schema, value);
  if (kind === "whole") return Number.isInteger(value) ? numberFault(schema, value) : worded("fault_whole");
  if (kind === "yes-no") return typeof value === "boolean" ? null : worded("fault_yes_no");
  if (kind === "fixed") return value === schema.const ? null : worded("fault_choice", { choices: schema.const });
  if (kind === "choice") return schema.enum.includes(value) ? null : worded("fault_choice", { choices: schema.enum.join(", ") });
  if (typeof value !== "string") return worded("fault_text");
  if ([...value].length > (schema.maxLength ?? Infinity)) return worded("fault_long", { most: schema.maxLength });
  if (schema.pattern && !new RegExp(schema.pattern, "u").test(value)) return worded("fault_pattern", { pattern: schema.pattern });
  return null;
}

function numberFault(schema, value) {
  if (typeof value !== "number") return worded("fault_number");
  if (value < schema.minimum) return worded("fault_least", { least: schema.minimum });
  if (value > schema.maximum) return worded("fault_most", { most: schema.maximum });
  if (value <= schema.exclusiveMinimum) return worded("fault_above", { least: schema.exclusiveMinimum });
  if (value >= schema.exclusiveMaximum) return worded("fault_below", { most: schema.exclusiveMaximum });
  return null;
}
