// Whether a number is within what its schema allows, told with the number, its unit and what is allowed.
import { text } from "../texts.js";

const worded = (name, values) => text(`movements.${name}`, values);
const withUnit = (words, unit) => (unit ? `${words} ${unit}` : words);

export function allowedWords(schema, unit) {
  const { minimum, maximum, exclusiveMinimum, exclusiveMaximum } = schema;
  const least = exclusiveMinimum !== undefined ? worded("range_above", { least: exclusiveMinimum }) : worded("range_from", { least: minimum });
  if (maximum === undefined && exclusiveMaximum === undefined) return withUnit(least, unit);
  const most = exclusiveMaximum !== undefined ? worded("range_below", { most: exclusiveMaximum }) : worded("range_to", { most: maximum });
  return withUnit(`${least} ${most}`, unit);
}

// What is wrong with a value that must be a number; null for nothing.
export function numberFault(schema, value, { unit, isWhole }) {
  const told = { seen: withUnit(shown(value), unit), allowed: allowedWords(schema, unit) };
  if (typeof value !== "number") return worded("fault_number", { ...told, seen: shown(value) });
  if (isWhole && !Number.isInteger(value)) return worded("fault_whole", told);
  const isOut =
    value < schema.minimum || value > schema.maximum || value <= schema.exclusiveMinimum || value >= schema.exclusiveMaximum;
  return isOut ? worded("fault_range", told) : null;
}

const shown = (value) => (typeof value === "number" || typeof value === "string" ? String(value) : JSON.stringify(value));
