// A form of the order's page becomes a request to the API; its answer becomes words.
import { find, say } from "../dom.js";
import { ask, Problem } from "../asking.js";
import { clearFaults, showFault } from "./faults.js";
import { bodyOf } from "./fields.js";
import { showLink } from "./link.js";
import { text } from "../texts.js";

// Sent again after a lost connection, the same words under the same name are done once.
const names = new WeakMap();
export function nameFor(form, body) {
  const words = JSON.stringify(body);
  const kept = names.get(form);
  if (kept?.words === words) return kept.name;
  const name = [...crypto.getRandomValues(new Uint8Array(16))].map((byte) => byte.toString(16).padStart(2, "0")).join("");
  names.set(form, { words, name });
  return name;
}

async function send(form, address) {
  const body = { ...bodyOf(form), ...(form.dataset.plan ? { plan: form.dataset.plan } : {}) };
  const isLink = form.dataset.do === "proof-links";
  const headers = isLink ? {} : { "Idempotency-Key": `"${nameFor(form, body)}"` };
  if (form.dataset.version) headers["If-Match"] = `"${form.dataset.version}"`;
  const answer = await ask("POST", `${address}/${form.dataset.do}`, { json: isLink ? undefined : body, headers });
  names.delete(form);
  return isLink ? showLink(answer.value) : null;
}

// The page may have been made anew around the form meanwhile, or hold it no more.
function showFaultOf(form, fault) {
  const shown = form.isConnected ? form : find(`form[data-do="${form.dataset.do}"]`);
  if (shown !== null) return showFault(shown, fault);
  const place = find("#not-done");
  place.textContent = text("orders.not_done", { why: fault.message });
  place.focus();
}

// Sends the form when it is asked to, each time once; `done` shows the order as it is then.
export function wireForm(form, address, done) {
  form.addEventListener("submit", async (event) => {
    event.preventDefault();
    const button = find("button[type=submit]", form);
    if (button.disabled) return;
    clearFaults(form);
    find("#not-done").textContent = "";
    button.disabled = true;
    try {
      await send(form, address);
      if (form.dataset.do === "reports") form.reset();
      say(form.dataset.done);
      await done();
    } catch (fault) {
      if (!(fault instanceof Problem)) throw fault;
      const isOld = /\/(order-changed|state-forbids)$/.test(fault.told.type ?? "");
      if (isOld) await done();
      button.disabled = false;
      showFaultOf(form, fault);
    } finally {
      button.disabled = false;
    }
  });
}
