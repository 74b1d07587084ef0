// The tune: chosen in its field, or dropped anywhere on the page. Its size is told at once, and judged.
import { find } from "../dom.js";
import { text } from "../texts.js";

const KIB = 1024;
const sizeOf = (bytes) => (bytes < 10 * KIB ? (Math.ceil((10 * bytes) / KIB) / 10).toFixed(1) : String(Math.ceil(bytes / KIB)));

// What is wrong with a file that can be seen without reading it; null for nothing.
export function faultOf(file, mostBytes) {
  if (!file) return text("new.no_tune");
  if (file.size === 0) return text("new.empty", { name: file.name });
  if (file.size > mostBytes) {
    return text("new.too_large", { name: file.name, size: sizeOf(file.size), most: Math.floor(mostBytes / KIB) });
  }
  return null;
}

export function showChosen(input) {
  const file = input.files[0];
  find("#chosen").textContent = file ? text("new.chosen", { name: file.name, size: sizeOf(file.size) }) : "";
}

// A copy, so that a file that is changed or moved meanwhile is told before anything is sent; null where it is gone.
export async function copyOf(file) {
  try {
    return new File([await file.arrayBuffer()], file.name, { type: "audio/midi" });
  } catch {
    return null;
  }
}

export function takeDrops(input, zone, refuse) {
  const holdsFiles = (event) => [...(event.dataTransfer?.types ?? [])].includes("Files");
  for (const name of ["dragenter", "dragover"]) {
    document.addEventListener(name, (event) => {
      if (!holdsFiles(event)) return;
      event.preventDefault();
      zone.classList.add("over");
    });
  }
  document.addEventListener("dragleave", (event) => {
    if (event.relatedTarget === null) zone.classList.remove("over");
  });
  document.addEventListener("drop", (event) => {
    zone.classList.remove("over");
    if (!holdsFiles(event)) return;
    event.preventDefault();
    const { files } = event.dataTransfer;
    if (files.length > 1) return refuse(text("new.one_file", { count: files.length }));
    input.files = files;
    input.dispatchEvent(new Event("change", { bubbles: true }));
  });
}
