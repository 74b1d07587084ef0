// Faults stand next to the field they are about, and in sum above the button, where the focus goes.
import { el, find, findAll } from "../dom.js";

export function clearFaults(form) {
  for (const one of findAll(".fault-of-field", form)) one.remove();
  for (const field of findAll("[aria-invalid]", form)) {
    field.removeAttribute("aria-invalid");
    field.setAttribute("aria-describedby", field.dataset.describedBy ?? "");
    if (!field.dataset.describedBy) field.removeAttribute("aria-describedby");
  }
  find(".fault:not(.fault-of-field)", form).textContent = "";
}

// A fault of a document that the form brings whole is about the field that holds it.
function fieldOf(form, document, pointer) {
  const holder = document ? find(`[data-kind="json"][name="${CSS.escape(document)}"]`, form) : null;
  if (holder !== null) return holder;
  const name = pointer.split("/")[1] ?? "";
  return name === "" ? null : find(`[name="${CSS.escape(name)}"]`, form);
}

function mark(field, detail) {
  const id = `${field.id}-fault`;
  field.dataset.describedBy ??= field.getAttribute("aria-describedby") ?? "";
  field.setAttribute("aria-invalid", "true");
  field.setAttribute("aria-describedby", `${id} ${field.dataset.describedBy}`.trim());
  field.after(el("span", { class: "fault fault-of-field", id }, detail));
}

// The fault of a request in the API's words.
export function showFault(form, fault) {
  const fields = (fault.told.invalid_params ?? [])
    .map(({ pointer, detail }) => ({ field: fieldOf(form, fault.told.document, pointer), detail }))
    .filter(({ field }) => field !== null);
  for (const { field, detail } of fields) if (!field.hasAttribute("aria-invalid")) mark(field, detail);
  find(".fault:not(.fault-of-field)", form).textContent = fault.message;
  (fields[0]?.field ?? find("button[type=submit]", form)).focus();
}
