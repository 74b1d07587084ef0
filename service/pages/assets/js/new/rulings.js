// Rulings by hand that a settings file brought: told, and taken away one by one or all at once.
import { el, find } from "../dom.js";
import { text } from "../texts.js";

const MOST_LISTED = 100; // of at most 50,000; of more their number is told

export function rulingWords({ note, do: deed, track }) {
  return text(`new.ruling_${deed.replace("-", "_")}`, { note, track });
}

// `taken(rulings)` hears which are left once some are taken away.
export function showRulings(rulings, taken) {
  const section = find("#rulings");
  section.hidden = rulings.length === 0;
  if (section.hidden) return;
  find("#rulings-title").textContent = rulings.length === 1 ? text("new.rulings_one") : text("new.rulings", { count: rulings.length });
  const rows = rulings.slice(0, MOST_LISTED).map((ruling, place) => {
    const words = rulingWords(ruling);
    const remove = { type: "button", class: "plain", "aria-label": text("new.ruling_remove_named", { words }) };
    const onclick = () => taken(rulings.toSpliced(place, 1));
    return el("li", {}, el("span", {}, words), el("button", { ...remove, onclick }, text("new.ruling_remove")));
  });
  if (rulings.length > MOST_LISTED) rows.push(el("li", {}, text("new.and_more", { count: rulings.length - MOST_LISTED })));
  find("#rulings-list").replaceChildren(...rows);
  find("#rulings-drop").onclick = () => taken([]);
}
