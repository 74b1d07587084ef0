// Faults where they belong: at the field that a pointer names, and together at the top, which gets the focus.
import { el, find, findAll } from "../dom.js";
import { text } from "../texts.js";

export function clear() {
  for (const field of findAll("[aria-invalid]")) field.removeAttribute("aria-invalid");
  for (const fault of findAll(".fault")) fault.replaceChildren();
}

function at(id, words) {
  const field = document.getElementById(id);
  const place = document.getElementById(`${id}-fault`);
  if (!field || !place) return false;
  field.setAttribute("aria-invalid", "true");
  field.closest("details")?.setAttribute("open", "");
  place.append(el("span", {}, words), " ");
  return true;
}

// The field of a pointer such as /speed/factor or /channels/leave_out/0; null where there is none.
function fieldOf(pointer) {
  const names = pointer.split("/").filter(Boolean);
  while (names.length) {
    const id = names.join(".");
    if (document.getElementById(`${id}-fault`)) return id;
    names.pop();
  }
  return null;
}

const labelOf = (id) => find(`label[for="${id}"]`).textContent;

export function tell(told) {
  const shown = [];
  for (const { pointer, detail } of told.invalid_params ?? []) {
    const id = fieldOf(pointer);
    if (id && at(id, detail)) shown.push({ id, words: detail });
    else shown.push({ id: null, words: `${pointer} ${detail}` });
  }
  const kind = (told.type ?? "").split("/").at(-1);
  const named = { "midi-unreadable": "tune", "tune-missing": "tune", "upload-too-large": "tune" }[kind]
    ?? { "movement-unknown": "movement", "cutter-unknown": "cutter" }[kind];
  if (shown.length === 0 && named) {
    at(named, told.detail);
    shown.push({ id: named, words: told.detail });
  }
  const top = find("#faults");
  const head = shown.length ? text("new.faults", { count: shown.length }) : (told.detail ?? told.title);
  top.append(el("p", {}, head));
  if (shown.length) {
    top.append(el("ul", {}, shown.map(({ id, words }) => el("li", {}, id ? el("a", { href: `#${id}` }, `${labelOf(id)}: ${words}`) : words))));
  }
  top.focus();
}
