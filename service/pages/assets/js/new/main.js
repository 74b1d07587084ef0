// The page on which a disc is begun: the file and the fields stay whatever the service says.
import { Problem } from "../asking.js";
import { el, find, say } from "../dom.js";
import { text } from "../texts.js";
import * as faults from "./faults.js";
import { missing, settingsOf, show, showWhatDepends } from "./fields.js";
import { rulingWords, showRulings } from "./rulings.js";
import { send } from "./sending.js";
import { saveAs, settingsIn } from "./settings_file.js";
import { begin } from "./stages.js";
import { copyOf, faultOf, showChosen, takeDrops } from "./tune_choice.js";

const form = find("#new-disc");
const input = find("#tune");
const mostBytes = Number(form.dataset.mostBytes);
let rulings = []; // that a settings file brought
let stages = null; // of what is under way

const redraw = () => showWhatDepends(form, rulings, (count) => text("new.changed", { count }));
const tuneFault = (words) => faults.show([{ id: "tune", words }]);

function keep(left) {
  rulings = left;
  showRulings(rulings, (fewer) => {
    faults.clearAt(find("#rulings"));
    keep(fewer);
    say(fewer.length ? text("new.rulings_left", { count: fewer.length }) : text("new.rulings_gone"));
    (fewer.length ? find("#rulings") : find("#settings-file")).focus();
  });
  redraw();
}

function led(made) {
  if (made.fingerprint) {
    stages.opening();
    location.assign(`/discs/${made.fingerprint}`);
    return;
  }
  stages.end();
  const discs = made.discs.map(({ fingerprint, title, disc, good_to_cut: isGood }) =>
    el("li", {},
      el("a", { href: `/discs/${fingerprint}` }, text("new.disc_of", { title, number: disc.number, of: disc.of })),
      " ",
      el("span", { class: isGood ? "good" : "bad" }, text(isGood ? "new.good" : "new.not_good"))));
  const list = find("#made");
  list.replaceChildren(el("h2", {}, text("new.made_several", { count: discs.length })), el("ul", {}, discs));
  list.focus();
}

async function lay(event) {
  event.preventDefault();
  if (form.inert) return;
  faults.clear();
  find("#made").replaceChildren();
  const [file] = input.files;
  const found = missing(form).map((id) => ({ id, words: text("new.needed") }));
  const words = faultOf(file, mostBytes);
  if (words) found.unshift({ id: "tune", words });
  if (found.length) return faults.show(found);
  const tune = await copyOf(file);
  if (tune === null) return tuneFault(text("new.gone", { name: file.name }));
  const ending = new AbortController();
  find("#give-up").onclick = () => ending.abort();
  const asked = { tune, movement: find("#movement").value, cutter: find("#cutter").value, settings: settingsOf(form, rulings) };
  stages = begin(form);
  try {
    led(await send(asked, stages, ending.signal));
  } catch (fault) {
    stages.end();
    if (!(fault instanceof Problem)) throw fault;
    faults.showTold(fault.told, (place) => (rulings[place] ? rulingWords(rulings[place]) : `${place}`));
  }
}

function judgeTune() {
  showChosen(input);
  const words = input.files[0] && faultOf(input.files[0], mostBytes);
  if (words) tuneFault(words);
}

async function fromFile(chooser) {
  const [file] = chooser.files;
  if (!file) return;
  faults.clear();
  try {
    const { settings, words } = await settingsIn(file);
    if (words) return faults.show(words.map((one) => ({ id: "settings-file", words: one })), text("new.settings_kept"));
    show(form, settings);
    keep(settings.rulings ?? []);
    say(text("new.settings_read", { name: file.name }));
  } catch (fault) {
    if (!(fault instanceof Problem)) throw fault;
    faults.show([{ id: "settings-file", words: fault.message }], text("new.settings_kept"));
  } finally {
    chooser.value = "";
  }
}

form.addEventListener("submit", lay);
form.addEventListener("input", ({ target }) => faults.clearAt(target));
form.addEventListener("change", ({ target }) => {
  if (target === find("#settings-file")) return fromFile(target);
  faults.clearAt(target);
  redraw();
  if (target === input) judgeTune();
});
takeDrops(input, find("#drop"), tuneFault);
find("#save-settings").addEventListener("click", () => saveAs(settingsOf(form, rulings), input.files[0]?.name));
// Who comes back from the disc finds the fields as the browser has kept them, which may be after this has run.
addEventListener("pageshow", () => {
  stages?.end();
  showChosen(input);
  redraw();
});
showChosen(input);
redraw();
form.dataset.ready = "true";
