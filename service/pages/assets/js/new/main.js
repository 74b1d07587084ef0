// A disc is asked for: the form, what is under way, and where the result is.
import { Problem } from "../asking.js";
import { el, find, pageData, say } from "../dom.js";
import { text } from "../texts.js";
import { Faults, faultsOf } from "./faults.js";
import { GivenUp, send } from "./sending.js";
import { saveAs, takeFrom, tellCarried } from "./settings_file.js";
import { SettingsForm } from "./settings_form.js";
import { showChosen, takeDrops, tuneFrom } from "./tune_choice.js";

const form = find("#asking");
const tune = find("#tune");
const underWay = find("#under-way");
const settings = new SettingsForm(form);
const faults = new Faults(form, find("#summary"));

function setStage(words) {
  find("#stage").textContent = words;
  say(words);
}

// Shows what is under way, and gives what sending tells and a way to end it.
function begin() {
  const progress = find("#progress");
  let clock = null;
  form.inert = true;
  underWay.hidden = false;
  find("#made").hidden = true;
  find("#elapsed").textContent = "";
  progress.value = 0;
  setStage(text("new.uploading"));
  find("#stage").focus();
  return {
    sent(share) {
      progress.value = 100 * share;
      find("#elapsed").textContent = text("new.uploaded", { percent: Math.round(100 * share) });
    },
    planning() {
      const began = performance.now();
      const tell = () => {
        const seconds = Math.floor((performance.now() - began) / 1000);
        find("#elapsed").textContent = text("new.planning_told", { seconds });
      };
      progress.removeAttribute("value");
      setStage(text("new.planning"));
      tell();
      clock = setInterval(tell, 1000);
    },
    end() {
      clearInterval(clock);
      form.inert = false;
      underWay.hidden = true;
    },
  };
}

const pageOf = (fingerprint) => `/discs/${encodeURIComponent(fingerprint)}`;

function showMade({ location, value }) {
  if (location) {
    say(text("new.made"));
    window.location.assign(pageOf(location.split("/").pop()));
    return;
  }
  const lines = value.discs.map(({ fingerprint, title, disc, good_to_cut: isGood }) =>
    el(
      "li",
      {},
      el("a", { href: pageOf(fingerprint) }, text("new.disc", { ...disc, title })),
      el("span", { class: isGood ? "good" : "bad" }, ` – ${text(isGood ? "new.good" : "new.not_good")}`),
    ),
  );
  const made = find("#made");
  find("ul", made).replaceChildren(...lines);
  made.hidden = false;
  made.focus();
}

async function makeDisc() {
  faults.clear();
  const given = await tuneFrom(tune, pageData("new-data").most_bytes);
  const found = settings.missing().map((field) => ({ field, words: text("new.needed") }));
  if (given.words) found.unshift({ field: tune, words: given.words });
  if (found.length) return faults.show(found);
  const giveUp = new AbortController();
  find("#give-up").onclick = () => giveUp.abort();
  const stages = begin();
  const asked = { tune: given.tune, settings: settings.read(), movement: find("#movement").value };
  try {
    const made = await send({ ...asked, cutter: find("#cutter").value }, stages, giveUp.signal);
    stages.end();
    showMade(made);
  } catch (fault) {
    stages.end();
    if (fault instanceof GivenUp) {
      say(text("new.given_up"));
      find("#send").focus();
    } else if (fault instanceof Problem) faults.show(faultsOf(form, fault.told, given.name));
    else throw fault;
  }
}

form.addEventListener("submit", (event) => {
  event.preventDefault();
  if (!form.inert) makeDisc();
});
tune.addEventListener("change", () => showChosen(tune));
takeDrops(tune, find("#drop"), (words) => faults.show([{ field: tune, words }]));
find("#settings-file").addEventListener("change", async ({ target }) => {
  const [file] = target.files;
  if (!file) return;
  faults.clear();
  const words = await takeFrom(file, settings);
  target.value = "";
  if (words) faults.show([{ field: target, words }]);
});
find("#save-settings").addEventListener("click", () => saveAs(settings, tune.files[0]?.name));
find("#drop-carried").addEventListener("click", () => {
  settings.dropCarried();
  tellCarried(settings);
  find("#send").focus();
});
showChosen(tune);
