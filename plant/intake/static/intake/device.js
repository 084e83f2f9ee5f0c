// This device: its clock beside the server's, the worker that opens the round without a network, and what it keeps for that.

import * as drafts from "./drafts.js";

const SHOWN_S = 120;
const FLAGGED_S = 600;

// Server time less the device's. Measured at every answer; what was measured last holds without a network.
export const clock = { offsetMs: 0 };
export const now = () => Date.now() + clock.offsetMs;

export function measured(serverMs) {
  clock.offsetMs = serverMs - Date.now();
  showClock();
}

export function showClock() {
  const place = document.getElementById("clock-off");
  const off = Math.round(-clock.offsetMs / 1000);
  if (!place) return;
  place.hidden = Math.abs(off) < SHOWN_S;
  place.textContent = place.hidden ? "" : `The clock of this device is ${words(Math.abs(off))} ${off > 0 ? "fast" : "slow"}. Times here are the server’s.${Math.abs(off) > FLAGGED_S ? " Entries are flagged until it is set right." : ""}`;
}

function words(seconds) {
  if (seconds < 5400) return `${Math.round(seconds / 60)} min`;
  return `${Math.round(seconds / 3600)} h`;
}

// The round as the server gave it, for the time without a network.
export async function keepRound(html, settings) {
  await drafts.keepRound({ works: settings.works, html, settings, offset_ms: clock.offsetMs, kept_ms: Date.now() });
}

export async function refetch(works) {
  try {
    const answer = await fetch(`/w/${works}/round/data/`, { redirect: "manual", cache: "no-store", signal: AbortSignal.timeout(10000) });
    if (!answer.ok) return false;
    const { html, settings } = await answer.json();
    measured(settings.now_ms);
    await keepRound(html, settings);
    return true;
  } catch {
    return false;
  }
}

export async function register() {
  if (!("serviceWorker" in navigator)) return;
  try {
    await navigator.serviceWorker.register("/sw.js");
    await navigator.serviceWorker.ready;
    document.documentElement.dataset.offline = "ready";
  } catch {
    document.documentElement.dataset.offline = "no";
  }
}
