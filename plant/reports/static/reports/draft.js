// While a draft is being made: asks how far it is, and puts the answer in place.

const EVERY_MS = 2000;

async function look() {
  const place = document.getElementById("draft-now");
  if (!place || place.dataset.working !== "yes") return;
  try {
    const answer = await fetch(place.dataset.fetch, { credentials: "same-origin", redirect: "error", signal: AbortSignal.timeout(10000) });
    if (answer.ok) place.outerHTML = await answer.text();
  } catch {
    // The network is away: what stands stays, and is asked for again.
  }
  setTimeout(look, EVERY_MS);
}

setTimeout(look, EVERY_MS);
