// The tune: chosen in the field, or dropped anywhere on the page.
import { find } from "../dom.js";
import { text } from "../texts.js";

export const sizeOf = (bytes) => (bytes / 1000).toFixed(bytes < 10_000 ? 1 : 0);

export function takeDrops(input, zone, refuse) {
  const mark = (isOver) => zone.classList.toggle("over", isOver);
  document.addEventListener("dragover", (event) => {
    if (![...event.dataTransfer.types].includes("Files")) return;
    event.preventDefault();
    mark(true);
  });
  document.addEventListener("dragleave", (event) => {
    if (event.relatedTarget === null) mark(false);
  });
  document.addEventListener("drop", (event) => {
    const { files } = event.dataTransfer;
    mark(false);
    if (!files.length) return;
    event.preventDefault();
    if (files.length > 1) return refuse(text("new.one_file", { count: files.length }));
    input.files = files;
    input.dispatchEvent(new Event("input", { bubbles: true }));
    input.dispatchEvent(new Event("change", { bubbles: true }));
  });
}

export function showChosen(input) {
  const [file] = input.files;
  find("#tune-chosen").textContent = file ? text("new.chosen", { name: file.name, size: sizeOf(file.size) }) : "";
}

// Gives { tune } as a copy that a later change of the file does not touch, or { words } that say why not.
export async function tuneFrom(input, mostBytes) {
  const [file] = input.files;
  if (!file) return { words: text("new.no_file") };
  const { name, size } = file;
  if (size > mostBytes) return { words: text("new.too_large", { name, size, most: mostBytes }) };
  try {
    return { tune: new Blob([await file.arrayBuffer()], { type: "audio/midi" }), name };
  } catch {
    return { words: text("new.gone", { name }) };
  }
}
