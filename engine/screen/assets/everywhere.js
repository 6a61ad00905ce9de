// What every page needs and Streamlit's own elements lack. Everything listens at the window: it is set up once.
//
// Numbers. A browser's own number field drops a comma as it is typed: 9,5 becomes 95 without a word. Here a comma
// becomes the point it stands for, in sight of whoever types. What could mean two things (1,234), has two decimal
// signs (1.234,5) or is no number is not taken: a message says why, and a field that is left shows its last value
// again.
//
// Scrolling. A wide table or a long word in a box scrolls sideways; without a mouse it must be reached to be read.
//
// The menu of a phone. It covers the page that was chosen in it, and so goes out of the way.

const AMBIGUOUS = /^[+-]?[1-9][0-9]{0,2}\.[0-9]{3}$/; // as shown, the comma having become a point
const COMMA = "comma", TWO = "two signs";
const marks = new WeakMap(); // of a field in which a sign was typed that calls for a second look
const taken = new WeakMap(); // the value of a field before it was typed into

export function everywhere({ parentElement }) {
  parentElement.closest("[data-testid=stElementContainer]").style.display = "none"; // it shows nothing
  const { dataset } = document.documentElement;
  if (dataset.everywhere) return;
  dataset.everywhere = "set up";
  numbers();
  scrolling();
  menu();
}

// ---- numbers

function numbers() {
  for (const kind of ["pointerdown", "keydown"]) window.addEventListener(kind, () => say(null), true);
  hear("focusin", (field) => taken.set(field, field.value));
  hear("beforeinput", sign);
  hear("input", (field, { inputType = "" }) => {
    const gone = inputType.startsWith("delete") ? marks.get(field) === TWO : false;
    if (gone || !field.value.includes(".")) marks.delete(field);
  });
  hear("keydown", (field, event) => {
    if (event.key !== "Enter") return;
    const fault = faultOf(field);
    if (!fault) return taken.set(field, field.value);
    event.preventDefault();
    event.stopImmediatePropagation();
    say(field, fault);
  });
  hear("focusout", (field) => {
    const fault = faultOf(field);
    if (!fault) return;
    put(field, taken.get(field) ?? "");
    say(field, `${fault} What stood there before stands again.`);
  });
}

// Hears of an event in a number field before the page does.
function hear(kind, then) {
  const isField = (target) => target instanceof HTMLInputElement && target.type === "number";
  window.addEventListener(kind, (event) => isField(event.target) && then(event.target, event), true);
}

// A sign is typed, or a text comes by the clipboard.
function sign(field, event) {
  const text = (event.data ?? event.dataTransfer?.getData("text/plain") ?? "").trim();
  if (text && !/[0-9.,+−-]/.test(text) && !/^e$/i.test(text)) {
    event.preventDefault(); // the browser would take away what is selected, and put nothing in its place
    return say(field, "Not taken: this is not a number.");
  }
  const signs = text.match(/[.,]/g) ?? [];
  const rest = field.value.replace(String(getSelection()) || field.value && "\0", "");
  if (signs.length + rest.includes(".") > 1) {
    event.preventDefault();
    if (text.length === 1) marks.set(field, TWO); // what is typed after it would be read as something else
    say(field, "One decimal sign only, and no sign between thousands: 1234.5 or 1234,5.");
  } else if (signs[0] === ",") {
    event.preventDefault();
    document.execCommand("insertText", false, text.replace(",", ".")); // as if typed: it can be undone
    marks.set(field, COMMA);
  }
}

function faultOf(field) {
  if (field.validity.badInput) return "Not taken: this is not a number.";
  if (marks.get(field) === TWO) return "Not taken: it was typed with two decimal signs.";
  if (marks.get(field) !== COMMA || !AMBIGUOUS.test(field.value)) return "";
  const whole = field.value.replace(".", "");
  return `Not taken: ${field.value.replace(".", ",")} can mean ${field.value} or ${whole}. ` +
    "Type it with a point, or without the comma.";
}

// Puts a value into a field so that the page hears of it.
function put(field, value) {
  marks.delete(field);
  Object.getOwnPropertyDescriptor(HTMLInputElement.prototype, "value").set.call(field, value);
  field.dispatchEvent(new Event("input", { bubbles: true }));
}

// A message under the field, above everything else; null takes it away.
function say(field, words = "") {
  const box = document.querySelector(".number-fault") ?? document.body.appendChild(document.createElement("div"));
  if (!field) return box.matches(":popover-open") && box.hidePopover();
  const { color, backgroundColor, fontFamily } = getComputedStyle(document.querySelector("[data-testid=stApp]"));
  const { left, bottom } = field.getBoundingClientRect();
  const width = Math.min(320, innerWidth - 16);
  box.className = "number-fault";
  box.setAttribute("role", "alert");
  box.popover = "manual";
  Object.assign(box.style, { color, backgroundColor, fontFamily, margin: 0, inset: "auto", width: `${width}px`,
    left: `${Math.min(left, innerWidth - width - 8)}px`, top: `${bottom + 6}px`, padding: "0.6rem 0.8rem",
    boxSizing: "border-box", border: "1px solid", borderLeftWidth: "4px", fontSize: "0.95rem" });
  box.textContent = words;
  if (!box.matches(":popover-open")) box.showPopover();
}

// ---- scrolling

const BOXES = "[data-testid=stTable] div, [data-testid=stTable], [data-testid=stCode] pre";

function scrolling() {
  let waiting = null;
  const soon = () => {
    clearTimeout(waiting);
    waiting = setTimeout(() => document.querySelectorAll(BOXES).forEach(reachable), 300); // things at rest again
  };
  new MutationObserver(soon).observe(document.body, { childList: true, subtree: true });
  window.addEventListener("resize", soon);
  soon();
}

function reachable(box) {
  const scrolls = box.scrollWidth > box.clientWidth + 1 || box.scrollHeight > box.clientHeight + 1;
  const cut = getComputedStyle(box).overflow !== "visible";
  if (scrolls && cut) box.tabIndex = 0;
  else if (box.hasAttribute("tabindex")) box.removeAttribute("tabindex");
}

// ---- the menu of a phone

function menu() {
  window.addEventListener("click", ({ target }) => {
    if (innerWidth >= 768 || !target.closest?.("[data-testid=stSidebarNavLink]")) return;
    setTimeout(() => document.querySelector("[data-testid=stSidebarCollapseButton] button")?.click());
  });
}
