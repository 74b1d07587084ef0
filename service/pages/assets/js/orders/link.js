// The link to a proof that was just made, and how it is copied.
import { find, say } from "../dom.js";
import { text } from "../texts.js";

// A service that does not know how it is reached tells the path alone: it is reached as this page is.
export function showLink({ href: told }) {
  const href = new URL(told, location.origin).href;
  const field = find("#link");
  field.value = href;
  find("#open-link").href = href;
  find("#made-link").hidden = false;
  field.focus();
  field.select();
}

// Browsers copy for pages that are reached over https or on this machine; elsewhere the person does it.
export function wireLink() {
  find("#copy-link").addEventListener("click", async () => {
    const field = find("#link");
    try {
      await navigator.clipboard.writeText(field.value);
      say(text("orders.copied"));
      find("#copy-link").textContent = text("orders.copied");
    } catch {
      field.focus();
      field.select();
      say(text("orders.copy_yourself"));
      find("#link-hint").textContent = text("orders.copy_yourself");
    }
  });
}
