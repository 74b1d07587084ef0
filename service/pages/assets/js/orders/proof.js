// A customer's word about a proof is sent to the API, and the page shown again with what was said.
import { find, pageData } from "../dom.js";
import { ask, Problem } from "../asking.js";
import { clearFaults, showFault } from "./faults.js";
import { bodyOf } from "./fields.js";

const { verdict } = pageData("proof-data");

find("#verdict")?.addEventListener("submit", async (event) => {
  event.preventDefault();
  const form = event.target;
  const button = find("button[type=submit]", form);
  clearFaults(form);
  button.disabled = true;
  try {
    await ask("POST", verdict, { json: bodyOf(form), open: true });
    history.replaceState(null, "", "#said-so-far"); // where the page then begins to be read
    location.reload();
  } catch (fault) {
    if (!(fault instanceof Problem)) throw fault;
    button.disabled = false;
    showFault(form, fault);
  }
});
