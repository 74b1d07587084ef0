// Faults where they belong: at the field that a pointer names, and together at the top, which gets the focus. A fault
// at a field goes as soon as the field is changed.
import { el, find, findAll } from "../dom.js";
import { text } from "../texts.js";

const OF_THE_TUNE = ["midi-unreadable", "tune-missing", "upload-too-large"];
const OF_A_CHOICE = { "movement-unknown": "movement", "cutter-unknown": "cutter" };
const RULINGS = "rulings";

const placeOf = (id) => document.getElementById(`${id}-fault`);
const isShown = (id) => document.getElementById(id).closest("[data-when][hidden]") === null;

function mend(field) {
  delete field.dataset.faulty;
  field.removeAttribute("aria-invalid");
}

export function clear() {
  for (const field of findAll("[data-faulty]")) mend(field);
  for (const fault of findAll(".fault")) fault.replaceChildren();
}

// The field of an element is being mended; with the last of them the summary goes too.
export function clearAt(element) {
  const field = element.closest("[data-faulty]");
  if (field === null) return;
  mend(field);
  placeOf(field.id).replaceChildren();
  if (find("[data-faulty]") === null) clear();
}

function mark(id, words) {
  const field = document.getElementById(id);
  field.dataset.faulty = "";
  if (field.matches("input, select")) field.setAttribute("aria-invalid", "true");
  for (let around = field.closest("details"); around; around = around.parentElement.closest("details")) around.open = true;
  placeOf(id).append(el("span", {}, words), " ");
}

// The field of a pointer such as /speed/factor or /channels/leave_out/0, else the choice that its part is ruled by.
function fieldOf(pointer) {
  const names = pointer.split("/").filter(Boolean);
  for (let count = names.length; count > 0; count -= 1) {
    const id = names.slice(0, count).join(".");
    if (placeOf(id) && isShown(id)) return id;
    const group = find(`[data-group="/${names.slice(0, count).join("/")}"]`);
    if (group) return group.id;
  }
  return null;
}

const nameOf = (id) =>
  (find(`label[for="${id}"]`) ?? document.getElementById(`${id}-legend`) ?? document.getElementById(`${id}-title`)).textContent;

function go(id) {
  const field = document.getElementById(id);
  const target = field.matches("fieldset") ? find("input", field) : field;
  target.focus();
}

function line({ id, words }) {
  if (id === null) return el("li", {}, words);
  const onclick = (event) => {
    event.preventDefault();
    go(id);
  };
  return el("li", {}, el("a", { href: `#${id}`, onclick }, nameOf(id)), `: ${words}`);
}

// faults: [{ id, words }], id being null where a fault is about no field.
export function show(faults, head = null) {
  clear();
  for (const { id, words } of faults) if (id !== null) mark(id, words);
  const top = find("#faults");
  top.append(el("p", {}, head ?? (faults.length === 1 ? text("new.faults_one") : text("new.faults", { count: faults.length }))));
  if (faults.length) top.append(el("ul", {}, faults.map(line)));
  top.focus();
}

// What the service found. told: problem details (RFC 9457); wordsOf(place) tells the ruling at a place.
export function showTold(told, wordsOf) {
  const found = (told.invalid_params ?? []).map(({ pointer, detail }) => {
    const id = fieldOf(pointer);
    const [, ruling] = /^\/rulings\/(\d+)/.exec(pointer) ?? [];
    if (id === RULINGS && ruling !== undefined) return { id, words: `${wordsOf(Number(ruling))}: ${detail}` };
    return { id, words: id === null ? `${pointer} ${detail}` : detail };
  });
  const kind = (told.type ?? "").split("/").at(-1);
  const named = OF_THE_TUNE.includes(kind) ? "tune" : OF_A_CHOICE[kind];
  if (found.length === 0 && named) found.push({ id: named, words: told.detail });
  show(found, found.length ? null : (told.detail ?? told.title));
}
