// Requests to the program that serves the page.

async function checked(response) {
  if (!response.ok) throw new Error((await response.text()).trim() || response.statusText);
  return response.status === 204 ? null : response.json();
}

// get asks until a signal comes, which ends it; without one until a connection must have died.
export async function get(path, parameters = {}, signal = AbortSignal.timeout(60000)) {
  return checked(await fetch(path + "?" + new URLSearchParams(parameters), { signal }));
}

export async function post(path, body) {
  return checked(await fetch(path, {
    method: "POST", headers: { "Content-Type": "application/json" }, body: JSON.stringify(body),
  }));
}

// pictureOf is the address of a picture; the mark of its view tells it from earlier ones.
export function pictureOf(kind, shot, mark) {
  return "/picture/" + kind + "?" + new URLSearchParams({ shot, mark });
}
