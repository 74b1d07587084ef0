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

// What was asked is done: the same words, sent again, are meant anew.
export const forgetName = (form) => names.delete(form);

// What each form asks of the API; a form that is not named here sends its fields to the address of its name.
const ASKED = {
  "proof-links": (_, address) => ["POST", `${address}/proof-links`, {}],
  erase: (_, address) => ["DELETE", address, {}],
  repeat: ({ dataset }, _, body) => {
    const order = JSON.stringify({ ...body, repeat_of: dataset.order });
    const form = new FormData();
    form.append("order", new Blob([order], { type: "application/json" }));
    return ["POST", "/v1/orders", { form }];
  },
};
const ONCE_ANYWAY = new Set(["proof-links", "erase"]); // twice does no harm, and they take no Idempotency-Key

async function send(form, address) {
  const { do: what, plan, version } = form.dataset;
  const body = { ...bodyOf(form), ...(plan ? { plan } : {}) };
  const headers = ONCE_ANYWAY.has(what) ? {} : { "Idempotency-Key": `"${nameFor(form, body)}"` };
  if (version) headers["If-Match"] = `"${version}"`;
  const [method, to, brought] = ASKED[what]?.(form, address, body) ?? ["POST", `${address}/${what}`, { json: body }];
  const { value } = await ask(method, to, { ...brought, headers });
  forgetName(form);
  if (what === "proof-links") showLink(value);
  if (what === "repeat") location.assign(`/orders/${value.id}`);
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
