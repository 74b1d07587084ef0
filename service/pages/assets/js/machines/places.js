// Places in a document: a list of names and numbers from its root, and as a JSON pointer (RFC 6901).
export const pointerOf = (path) => path.map((part) => `/${String(part).replace(/~/g, "~0").replace(/\//g, "~1")}`).join("");

// The place without the numbers of lists, as the sections on measuring name it.
export const generalOf = (path) => path.filter((part) => typeof part !== "number").map((part) => `/${part}`).join("");

export function at(value, path) {
  let here = value;
  for (const part of path) {
    if (here === null || typeof here !== "object") return undefined;
    here = here[part];
  }
  return here;
}

// Puts a value at a place, with what must lie around it; undefined takes it away.
export function put(value, path, wanted) {
  let here = value;
  path.slice(0, -1).forEach((part, depth) => {
    if (here[part] === null || typeof here[part] !== "object") {
      if (wanted === undefined) return;
      here[part] = typeof path[depth + 1] === "number" ? [] : {};
    }
    here = here[part];
  });
  const last = path[path.length - 1];
  if (wanted !== undefined) here[last] = wanted;
  else if (Array.isArray(here)) here.splice(last, 1);
  else delete here[last];
}
