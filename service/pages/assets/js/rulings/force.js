// The rulings in force, each with a way to take it back, and what was found against one of them.
import { el, find } from "../dom.js";
import { text } from "../texts.js";
import { rulingsOf, without } from "./settings.js";
import { rulingWords } from "./words.js";

export function drawForce(state, settings, { rule, show }, faults = []) {
  const rulings = rulingsOf(settings);
  find("#ruling-none").hidden = rulings.length > 0;
  find("#ruling-list").replaceChildren(...rulings.map((ruling) => {
    const words = rulingWords(ruling, state.layout, state.movement);
    const found = faults.filter((fault) => fault.ruling !== null && isSame(fault.ruling, ruling));
    const back = () => rule(without(settings, [ruling.note]), text("rulings.did_back", { words }));
    return el(
      "li",
      { class: `ruling${found.length ? " at-fault" : ""}`, "data-note": ruling.note },
      el("span", {}, words),
      el("button", { type: "button", class: "plain", "aria-label": text("rulings.show_named", { words }), onclick: () => show(ruling.note) }, text("rulings.show")),
      el("button", { type: "button", class: "plain", "aria-label": text("rulings.take_back_named", { words }), onclick: back }, text("rulings.take_back")),
      found.map((fault) => el("p", { class: "why" }, fault.words)),
    );
  }));
}

const isSame = (one, other) => one.note === other.note && one.do === other.do && one.track === other.track;
