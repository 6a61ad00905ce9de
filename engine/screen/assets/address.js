// Writes values into the query of the page's address, in place of the present history entry.

export function address({ data, parentElement }) {
  parentElement.closest("[data-testid=stElementContainer]").style.display = "none"; // it shows nothing
  const page = new URL(location.href);
  for (const [name, value] of Object.entries(data.query)) {
    if (value === null) page.searchParams.delete(name);
    else page.searchParams.set(name, value);
  }
  if (page.href !== location.href) history.replaceState(history.state, "", page);
}
