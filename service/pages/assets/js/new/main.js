// The page on which a disc is begun: the file and the fields stay whatever the service says.
import { el, find, say } from "../dom.js";
import { text } from "../texts.js";
import { clear, tell } from "./faults.js";
import { send } from "./sending.js";
import { settingsOf, show } from "./settings_form.js";

const form = find("#new-disc");
const input = find("#tune");
const drop = find("#drop");
let dropped = null; // a file that was dropped; the input keeps one that was chosen
let kept = {}; // what a settings file says that the page has no field for

const tune = () => dropped ?? input.files[0] ?? null;

function showTune() {
  const file = tune();
  find("#chosen").textContent = file ? text("new.chosen", { name: file.name, size: Math.ceil(file.size / 1024) }) : "";
}

function underWay(isUnderWay) {
  find("#under-way").hidden = !isUnderWay;
  find("#give-up").hidden = !isUnderWay;
  find("#send").disabled = isUnderWay;
}

function told(stage, share) {
  const progress = find("#progress");
  find("#stage").textContent = text(`new.${stage}`);
  if (share === null) progress.removeAttribute("value");
  else progress.value = share;
}

function led(made) {
  if (made.fingerprint) {
    location.assign(`/discs/${made.fingerprint}`);
    return;
  }
  const discs = made.discs.map(({ fingerprint, title, disc }) =>
    el("li", {}, el("a", { href: `/discs/${fingerprint}` }, text("new.disc_of", { title, number: disc.number, of: disc.of }))));
  const list = find("#made");
  list.replaceChildren(el("h2", {}, text("new.made_several", { count: discs.length })), el("ul", {}, discs));
  list.focus();
}

async function begin(event) {
  event.preventDefault();
  clear();
  const file = tune();
  if (!file) return tell({ type: "/problems/tune-missing", detail: text("new.no_tune") });
  if (file.size > Number(form.dataset.mostBytes)) {
    const most = Math.floor(Number(form.dataset.mostBytes) / 1024);
    return tell({ type: "/problems/upload-too-large", detail: text("new.too_large", { most }) });
  }
  const ending = new AbortController();
  find("#give-up").onclick = () => ending.abort();
  underWay(true);
  told("sending", 0);
  const asked = { tune: file, movement: find("#movement").value, cutter: find("#cutter").value, settings: settingsOf(form, kept) };
  try {
    led(await send(asked, { told, giveUp: ending.signal }));
  } catch (fault) {
    if (!fault.told) throw fault;
    tell(fault.told);
  } finally {
    underWay(false);
  }
}

async function fromFile({ target }) {
  const file = target.files[0];
  if (!file) return;
  clear();
  try {
    const settings = JSON.parse(await file.text());
    if (settings === null || typeof settings !== "object" || Array.isArray(settings)) throw new SyntaxError();
    kept = show(form, settings);
    say(text("new.settings_read", { name: file.name }));
  } catch {
    tell({ detail: text("new.settings_unread", { name: file.name }) });
  }
  target.value = "";
}

function toFile() {
  const words = `${JSON.stringify(settingsOf(form, kept), null, 2)}\n`;
  const address = URL.createObjectURL(new Blob([words], { type: "application/json" }));
  el("a", { href: address, download: "settings.json" }).click();
  setTimeout(() => URL.revokeObjectURL(address), 1000);
}

form.addEventListener("submit", begin);
input.addEventListener("change", () => { dropped = null; showTune(); });
for (const name of ["dragenter", "dragover"]) {
  drop.addEventListener(name, (event) => { event.preventDefault(); drop.classList.add("over"); });
}
drop.addEventListener("dragleave", () => drop.classList.remove("over"));
drop.addEventListener("drop", (event) => {
  event.preventDefault();
  drop.classList.remove("over");
  if (event.dataTransfer.files.length) { [dropped] = event.dataTransfer.files; showTune(); }
});
find("#settings-file").addEventListener("change", fromFile);
find("#save-settings").addEventListener("click", toFile);
showTune();
form.dataset.ready = "true";
