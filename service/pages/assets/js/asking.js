// Asks the API of this service, with the token that a signed-in browser's writes must bring.
import { text } from "./texts.js";

export class Problem extends Error {
  constructor(told) {
    super(told.detail || told.title);
    this.told = told;
  }
}

let token = null;

export async function tokenOfThisBrowser() {
  if (document.getElementById("sign-out") === null) return ""; // nobody is signed in here
  if (token === null) {
    const answer = await fetch("/v1/keys/me", { headers: { Accept: "application/json" } });
    token = answer.ok ? (await answer.json()).csrf_token || "" : "";
  }
  return token;
}

// Gives { status, headers, value }; value is JSON where the answer is. Raises Problem in the API's words.
// `open` is for routes that look at no key: they want no token.
export async function ask(method, path, { json, form, body, headers = {}, open = false } = {}) {
  const head = { Accept: "application/json", ...headers };
  if (method !== "GET" && !open) {
    const own = await tokenOfThisBrowser();
    if (own) head["X-CSRF-Token"] = own;
  }
  if (json !== undefined) head["Content-Type"] = "application/json";
  let answer;
  try {
    answer = await fetch(path, { method, headers: head, body: json === undefined ? form ?? body : JSON.stringify(json) });
  } catch {
    throw new Problem({ title: text("common.unreachable"), detail: text("common.unreachable") });
  }
  const kind = answer.headers.get("Content-Type") || "";
  const value = kind.includes("json") ? await answer.json() : null;
  if (!answer.ok) throw new Problem(value ?? { detail: text("common.unexpected", { status: answer.status }) });
  return { status: answer.status, headers: answer.headers, value };
}
