// The fields of the page and the settings document they stand for; what stays at its default is left out.
import { findAll } from "../dom.js";

const fields = (form) => findAll("[data-kind]", form);

function valueOf(field) {
  const written = field.value.trim();
  if (field.dataset.kind === "number") return field.validity.badInput ? "?" : written === "" ? null : Number(written);
  if (field.dataset.kind === "list") {
    return written === "" ? [] : written.split(/[\s,]+/).map((one) => (/^\d+$/.test(one) ? Number(one) : one));
  }
  return written === "" ? null : written;
}

function put(document, path, value) {
  const names = path.split(".");
  const last = names.pop();
  let inside = document;
  for (const name of names) inside = inside[name] ??= {};
  inside[last] = value;
}

function get(document, path) {
  return path.split(".").reduce((inside, name) => inside?.[name], document);
}

// The settings document; `kept` brings what the page has no field for, such as rulings.
export function settingsOf(form, kept = {}) {
  const settings = { format: "discwright-settings/1", ...kept };
  for (const field of fields(form)) {
    if (field.value.trim() === field.dataset.default && !field.validity.badInput) continue;
    const value = valueOf(field);
    if (value !== null) put(settings, field.name, value);
  }
  return settings;
}

// Shows a settings document in the fields; gives what the page has no field for.
export function show(form, settings) {
  const left = structuredClone(settings);
  delete left.format;
  for (const field of fields(form)) {
    const value = get(settings, field.name);
    if (value === undefined || value === null) field.value = field.dataset.default;
    else field.value = Array.isArray(value) ? value.join(", ") : String(value);
    const names = field.name.split(".");
    const owner = names.length > 1 ? left[names[0]] : left;
    if (owner) delete owner[names.at(-1)];
  }
  for (const [name, value] of Object.entries(left)) {
    if (value && typeof value === "object" && !Array.isArray(value) && Object.keys(value).length === 0) delete left[name];
  }
  return left;
}
