// The disc that is shown is ordered: the tune and the settings it was made from go to the API with what the form says.
import { find, pageData } from "../dom.js";
import { ask, Problem } from "../asking.js";
import { clearFaults, showFault } from "../orders/faults.js";
import { bodyOf } from "../orders/fields.js";
import { forgetName, nameFor } from "../orders/sending.js";
import { text } from "../texts.js";

// What a layout was made from, byte for byte.
async function broughtFor(address) {
  let answer;
  try {
    answer = await fetch(address);
  } catch {
    throw new Problem({ detail: text("common.unreachable") });
  }
  if (!answer.ok) throw new Problem((await answer.json().catch(() => null)) ?? { detail: text("common.unexpected", { status: answer.status }) });
  return answer.blob();
}

async function send(form, fingerprint) {
  const { order, parts } = pageData("ordering-data");
  const asked = { ...order, ...bodyOf(form) };
  const base = `/v1/layouts/${fingerprint}`;
  const [tune, settings] = await Promise.all([broughtFor(`${base}/tune.mid`), broughtFor(`${base}/settings.json`)]);
  const body = new FormData();
  body.append("order", new Blob([JSON.stringify(asked)], { type: "application/json" }));
  body.append("tune", tune, "tune.mid");
  body.append("settings", settings);
  for (const [name, words] of Object.entries(parts)) body.append(name, new Blob([words], { type: "application/json" }));
  const headers = { "Idempotency-Key": `"${nameFor(form, { asked, fingerprint })}"` };
  const { value } = await ask("POST", "/v1/orders", { form: body, headers });
  forgetName(form);
  return value;
}

// `state` is the page's: rulings may have put another disc into it meanwhile.
export function openOrdering(state) {
  const form = find("#ordering");
  form?.addEventListener("submit", async (event) => {
    event.preventDefault();
    const button = find("button[type=submit]", form);
    if (button.disabled) return;
    clearFaults(form);
    button.disabled = true;
    try {
      location.assign(`/orders/${(await send(form, state.layout.fingerprint)).id}`);
    } catch (fault) {
      if (!(fault instanceof Problem)) throw fault;
      button.disabled = false;
      showFault(form, fault);
    }
  });
  // Who comes back from the order finds the page as it was left, and may order the disc once more.
  addEventListener("pageshow", ({ persisted }) => {
    if (persisted && form) find("button[type=submit]", form).disabled = false;
  });
}
