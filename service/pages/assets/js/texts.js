// The words a page's scripts show, from the block of data the page brings.
const texts = JSON.parse(document.getElementById("texts").textContent);

export function text(key, values = {}) {
  if (!(key in texts)) throw new Error(`no text ${key}`);
  return texts[key].replace(/\{(\w+)\}/g, (_, name) => {
    if (!(name in values)) throw new Error(`text ${key} wants ${name}`);
    return String(values[name]);
  });
}
