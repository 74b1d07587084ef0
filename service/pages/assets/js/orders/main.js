// The page of an order: what is decided is sent to the API, and what happens is shown as it happens.
import { findAll, pageData } from "../dom.js";
import { followEvents } from "./events.js";
import { wireForm } from "./sending.js";
import { wireLink } from "./link.js";
import { refresh } from "./refreshing.js";

const data = pageData("order-data");

function wire() {
  for (const form of findAll("form[data-do]")) {
    if (form.dataset.wired) continue;
    form.dataset.wired = "yes";
    wireForm(form, data.address, refreshed);
  }
}

async function refreshed() {
  await refresh(wire);
}

wire();
wireLink();
followEvents(data, refreshed);
