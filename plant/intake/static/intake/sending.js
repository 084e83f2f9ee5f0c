// One entry to the server, as often as it must: the id is the entry's own, so a repeat adds nothing.

const WAIT_MS = 10000;

// {state: "taken" | "refused" | "unsent", body, status}. "unsent" is anything that may come right by itself.
export async function send(address, entry, token) {
  let response;
  try {
    response = await fetch(address + entry.id, {
      method: "PUT",
      headers: { "Content-Type": "application/json", "X-CSRFToken": token },
      body: JSON.stringify(entry.body),
      credentials: "same-origin",
      redirect: "manual",
      signal: AbortSignal.timeout(WAIT_MS),
    });
  } catch {
    return { state: "unsent", status: 0, body: {} };
  }
  // A session that has ended answers with a redirect to the sign-in page, or refuses.
  if (response.type === "opaqueredirect" || response.status === 401 || response.status === 403) {
    return { state: "unsent", status: response.status, body: {}, signedOut: true };
  }
  const body = await response.json().catch(() => ({}));
  if (response.status === 200 || response.status === 201) return { state: "taken", status: response.status, body };
  if (response.status === 409 || response.status === 413 || response.status === 422) return { state: "refused", status: response.status, body };
  return { state: "unsent", status: response.status, body };
}

export function newId() {
  return crypto.randomUUID();
}
