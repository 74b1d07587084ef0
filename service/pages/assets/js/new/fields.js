// The fields of the page and the settings document they stand for. What stays at its default is left out, and so is
// what is hidden since the mode chosen has no use for it; it stays in its field for whoever chooses the mode again.
import { find, findAll } from "../dom.js";

const FORMAT = "discwright-settings/1";
const WITH_RULINGS = "rulings"; // in data-among: shown too while rulings by hand stand
// Choices of this page that no setting holds: which settings, where stated, speak for which of their values.
const PICKS = {
  "passage-from": { s: "passage.from_s", bar: "passage.from_bar" },
  "passage-to": { s: "passage.to_s", bar: "passage.to_bar" },
  "channels-which": { leave_out: "channels.leave_out", keep_only: "channels.keep_only" },
};

const fieldsOf = (within) => findAll("[data-kind]", within);
const ticked = (field) => findAll("input:checked", field).map((tick) => Number(tick.value));
const isShown = (field) => field.closest("[data-when][hidden]") === null;
const written = (field) => (field.dataset.kind === "ticks" ? ticked(field).join(" ") : field.value.trim());
const isBad = (field) => field.validity?.badInput === true; // a number field with what is no number
const isChanged = (field) => isShown(field) && (isBad(field) || !["", field.dataset.default].includes(written(field)));

function valueOf(field) {
  if (field.dataset.kind === "ticks") return ticked(field);
  if (field.dataset.kind === "number") return isBad(field) ? "?" : Number(written(field));
  return written(field);
}

function put(document, path, value) {
  const names = path.split(".");
  const last = names.pop();
  let inside = document;
  for (const name of names) inside = inside[name] ??= {};
  inside[last] = value;
}

// A number may be stated with what it is worth: { value, plus_minus, basis }.
function get(document, path) {
  const found = path.split(".").reduce((inside, name) => inside?.[name], document) ?? null;
  return found !== null && typeof found === "object" && "value" in found ? found.value : found;
}

export function settingsOf(form, rulings) {
  const settings = { format: FORMAT };
  for (const field of fieldsOf(form)) if (isChanged(field)) put(settings, field.name, valueOf(field));
  if (rulings.length) settings.rulings = rulings;
  return settings;
}

// Every field as a settings document has it; the others go back to their defaults.
export function show(form, settings) {
  for (const field of fieldsOf(form)) {
    const value = get(settings, field.name);
    if (field.dataset.kind === "ticks") {
      for (const tick of findAll("input", field)) tick.checked = (value ?? []).includes(Number(tick.value));
    } else field.value = value === null ? field.dataset.default : String(value);
  }
  for (const [id, speaking] of Object.entries(PICKS)) {
    const isStated = ([, path]) => ![null, ""].includes(get(settings, path)?.toString() ?? null);
    find(`#${id}`).value = Object.entries(speaking).findLast(isStated)?.[0] ?? find(`#${id}`).dataset.default;
  }
}

// Shows what the choices made have a use for, and how much is changed in each fold.
export function showWhatDepends(form, rulings, changedWords) {
  for (const holder of findAll("[data-when]", form)) {
    const among = holder.dataset.among.split(" ");
    const chosen = document.getElementById(holder.dataset.when).value;
    holder.hidden = !among.includes(chosen) && !(rulings.length && among.includes(WITH_RULINGS));
  }
  for (const fold of findAll("details.fold", form)) {
    const count = fieldsOf(fold).filter(isChanged).length;
    find(".changed", fold).textContent = count ? changedWords(count) : "";
  }
}

// Ids of fields that are shown, must be filled, and are empty.
export const missing = (form) =>
  fieldsOf(form)
    .filter((field) => field.ariaRequired === "true" && isShown(field) && written(field) === "" && !isBad(field))
    .map((field) => field.id);
