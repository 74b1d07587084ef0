// Faults stand at the field they are about; a summary with links to them takes the focus.
import { el, find, findAll } from "../dom.js";
import { text } from "../texts.js";

const OF_THE_TUNE = ["midi-unreadable", "tune-missing", "upload-too-large"];
const OF_A_CHOICE = { "movement-unknown": "movement", "cutter-unknown": "cutter" };

export class Faults {
  #form;
  #summary;

  constructor(form, summary) {
    this.#form = form;
    this.#summary = summary;
    form.addEventListener("input", ({ target }) => this.#clearOne(target));
  }

  clear() {
    for (const field of findAll("[aria-invalid]", this.#form)) field.removeAttribute("aria-invalid");
    for (const place of findAll(".fault", this.#form)) place.textContent = "";
    this.#summary.hidden = true;
  }

  // faults: [{ field, group, words }]; of the two places one, or none where a fault is about no field.
  show(faults) {
    this.clear();
    for (const { field, group, words } of faults) this.#mark(field, group, words);
    const title = faults.length === 1 ? text("new.faults_one") : text("new.faults", { count: faults.length });
    find("h2", this.#summary).textContent = title;
    find("ul", this.#summary).replaceChildren(...faults.map((fault) => el("li", {}, this.#linkTo(fault))));
    this.#summary.hidden = false;
    this.#summary.focus();
  }

  #mark(field, group, words) {
    const place = field ? find(`#${field.id}-fault`, this.#form) : group && find(".fault", group);
    if (field) field.setAttribute("aria-invalid", "true");
    if (place) place.textContent = [place.textContent, words].filter(Boolean).join(" · ");
    for (let around = place?.closest("details"); around; around = around.parentElement.closest("details")) {
      around.open = true;
    }
  }

  #linkTo({ field, group, words }) {
    const target = field ?? (group && findAll("input, select", group).find((one) => one.offsetParent !== null));
    if (!target) return words;
    const name = field ? find(`label[for="${field.id}"]`, this.#form) : find("legend", group);
    const goThere = (event) => {
      event.preventDefault();
      target.focus();
    };
    return el("span", {}, el("a", { href: `#${target.id}`, onclick: goThere }, name.textContent), `: ${words}`);
  }

  #clearOne(field) {
    field.removeAttribute("aria-invalid");
    const place = find(`#${field.id}-fault`, this.#form);
    if (place) place.textContent = "";
    const ofGroup = field.closest("[data-group]")?.querySelector(".fault");
    if (ofGroup) ofGroup.textContent = "";
  }
}

// The place of a JSON pointer of the settings: its field, else the nearest field or group around it.
export function placeOf(form, pointer) {
  const steps = pointer.split("/");
  for (let count = steps.length; count > 1; count -= 1) {
    const at = steps.slice(0, count).join("/");
    const field = findAll("[data-at]", form).find((one) => one.dataset.at === at);
    if (field && field.closest("[data-when]")?.hidden !== true) return { field };
    const group = findAll("[data-group]", form).find((one) => one.dataset.group === at);
    if (group) return { group };
  }
  return {};
}

// What the service found, at the places it is about. told: problem details (RFC 9457).
export function faultsOf(form, told, fileName) {
  const name = (told.type ?? "").split("/").pop();
  if (told.document === "settings" && told.invalid_params?.length) {
    return told.invalid_params.map(({ pointer, detail }) => {
      const place = placeOf(form, pointer);
      return { ...place, words: place.field || place.group ? detail : `${pointer}: ${detail}` };
    });
  }
  if (name === "midi-unreadable" && told.found) {
    const values = { byte: told.byte_offset, name: fileName, found: told.found, expected: told.expected };
    return [{ field: find("#tune"), words: text("new.midi_found", { ...values, remedy: told.remedy }) }];
  }
  const words = told.detail || told.title;
  if (OF_THE_TUNE.includes(name)) return [{ field: find("#tune"), words }];
  return [{ field: name in OF_A_CHOICE ? find(`#${OF_A_CHOICE[name]}`) : null, words }];
}
