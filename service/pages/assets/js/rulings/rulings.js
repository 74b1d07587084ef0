// Rulings by hand: each asks for the best arrangement around it; what comes stands in the place of what was shown, and
// what was shown is kept for undo. Where the rulings contradict, that is told and what is shown stays.
import { ask, Problem } from "../asking.js";
import { el, find, say } from "../dom.js";
import { text } from "../texts.js";
import { drawChoices } from "./choices.js";
import { differenceOf, isNone } from "./difference.js";
import { drawForce } from "./force.js";
import { History } from "./history.js";
import { openMarks, thingsByNote } from "./marks.js";
import { pageAt, partsOf, putParts } from "./pages.js";
import { held, holdsPitch, letGo, notesOf } from "./settings.js";
import { differenceRows, faultsOf } from "./words.js";

const SETTINGS = "settings.json";
const AGAIN = "again";

export class Rulings {
  #disc;
  #state;
  #history;
  #marks;
  #first;
  #section = find("#rulings");
  #hold = find("#ruling-hold");
  #fault = find("#ruling-fault");

  // `disc` is what openDisc gives; `settings` those that the disc shown was made with.
  constructor(disc, data, settings) {
    [this.#disc, this.#state] = [disc, disc.state];
    this.#first = settings;
    this.#history = new History({ settings, data, parts: partsOf(document), title: document.title, said: "" });
    this.#marks = openMarks(disc);
    find("#ruling-undo").addEventListener("click", () => this.undo());
    find("#ruling-redo").addEventListener("click", () => this.redo());
    document.addEventListener("keydown", (event) => this.#onKey(event));
    this.#state.subscribe("chosen", () => this.#drawChoices());
    this.#draw();
    this.#section.dataset.ready = "true";
  }

  get settings() {
    return this.#history.now.settings;
  }

  // Asks for the best arrangement with these settings, and shows it.
  async rule(wanted, words) {
    if (this.#isBusy) return;
    const settings = this.#hold.checked ? held(wanted, this.#state.layout.transposed_semitones) : letGo(wanted, this.#first);
    this.#busy(true);
    const began_ms = performance.now();
    try {
      const base = this.#history.now.data.rulings_at;
      const { value } = await ask("POST", base, { json: settings });
      const { number } = this.#state.layout.disc;
      const made = value.discs ? value.discs[number - 1] : value;
      const page = await pageAt(`/discs/${made.fingerprint}`);
      this.#history.add({ settings, said: words, ...page });
      this.#change(this.#state.layout, words);
      this.#section.dataset.tookMs = (performance.now() - began_ms).toFixed(0);
    } catch (problem) {
      if (!(problem instanceof Problem)) throw problem;
      this.#tell(problem, settings);
    } finally {
      this.#busy(false);
    }
  }

  undo() {
    if (this.#isBusy || !this.#history.canUndo) return;
    const { said } = this.#history.now;
    const before = this.#state.layout;
    this.#history.undo();
    this.#change(before, text("rulings.undone", { words: said }));
  }

  redo() {
    if (this.#isBusy || !this.#history.canRedo) return;
    const before = this.#state.layout;
    this.#change(before, text("rulings.redone", { words: this.#history.redo().said }));
  }

  // Chooses what plays a note, or the note where it is left out, and brings it into view.
  show(note) {
    const thing = this.#thingOf(note);
    if (thing) this.#disc.pointing.go(thing, true);
  }

  get #isBusy() {
    return this.#section.getAttribute("aria-busy") === "true";
  }

  #busy(is) {
    this.#section.setAttribute("aria-busy", String(is));
    if (is) say(text("rulings.searching"));
  }

  // Puts the step that stands now into the page, and tells the difference to the layout before.
  #change(before, words) {
    const { data, parts, title } = this.#history.now;
    const things = thingsByNote(this.#state.shown);
    const { chosen } = this.#state;
    const held = this.#section.contains(document.activeElement) ? document.activeElement.id : null;
    putParts(parts, title);
    history.replaceState(null, "", data.rulings_at.replace("/v1/layouts/", "/discs/").replace(`/${AGAIN}`, ""));
    this.#state.show(data.layout, data.hearing);
    if (chosen !== null && notesOf(chosen).length) this.#state.choose(this.#thingOf(notesOf(chosen)[0]) ?? null);
    const difference = differenceOf(before, data.layout);
    this.#marks.show(difference, things);
    this.#draw();
    this.#tellDifference(difference, before, words);
    this.#focusAfter(held);
  }

  #thingOf(note) {
    const { shown } = this.#state;
    return shown.projections.find((one) => one.again_of === undefined && one.notes.includes(note)) ?? shown.leftOut.find((one) => one.note === note);
  }

  #draw() {
    this.#fault.replaceChildren();
    find("#ruling-undo").disabled = !this.#history.canUndo;
    find("#ruling-redo").disabled = !this.#history.canRedo;
    this.#hold.checked = this.#history.now.settings === this.#first || holdsPitch(this.settings);
    find("#ruling-save").href = this.#history.now.data.rulings_at.replace(AGAIN, SETTINGS);
    this.#drawChoices();
    this.#drawForce();
  }

  #drawChoices() {
    drawChoices(this.#state, this.settings, (settings, words) => this.rule(settings, words));
  }

  #drawForce(faults = []) {
    const deeds = { rule: (settings, words) => this.rule(settings, words), show: (note) => this.show(note) };
    drawForce(this.#state, this.settings, deeds, faults);
  }

  #tellDifference(difference, before, words) {
    const rows = differenceRows(difference, before, this.#state.layout);
    if (isNone(difference)) rows.unshift({ kind: "none", words: text("rulings.no_difference") });
    find("#ruling-difference").hidden = false;
    find("#ruling-difference-words").replaceChildren(...rows.map((row) => el("li", { class: row.kind }, row.words)));
    say([words, ...rows.map((row) => row.words)].join(" "));
  }

  #tell(problem, settings) {
    const faults = faultsOf(problem.told, settings);
    this.#drawForce(faults);
    this.#fault.replaceChildren(
      el("p", {}, el("strong", {}, text("rulings.refused"))),
      ...faults.map((fault) => el("p", {}, fault.words)),
    );
    this.#fault.focus();
  }

  // The button that was pressed may be gone: the focus stays with what can be ruled.
  #focusAfter(held) {
    if (held === null) return;
    const again = held && find(`#${held}`);
    (again && !again.disabled ? again : find("#ruling-deeds")).focus({ preventScroll: true });
  }

  #onKey(event) {
    if (!(event.ctrlKey || event.metaKey) || event.altKey || event.key.toLowerCase() !== "z") return;
    if (event.target.closest("input[type=text], textarea")) return;
    event.preventDefault();
    if (event.shiftKey) this.redo();
    else this.undo();
  }
}

// The part of the page for rulings, where the disc takes any.
export async function openRulings(disc, data) {
  if (data.rulings_at === null || find("#rulings") === null) return;
  try {
    const { value } = await ask("GET", data.rulings_at.replace(AGAIN, SETTINGS));
    disc.rulings = new Rulings(disc, data, value);
  } catch (problem) {
    if (!(problem instanceof Problem)) throw problem;
    find("#ruling-fault").textContent = problem.message;
  }
}
