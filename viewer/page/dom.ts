// How does the page make its elements?

type Attributes = Readonly<Record<string, string | number>>;
type Children = readonly (Node | string)[];

/** An HTML element with attributes and children. Styles belong to the style sheet: the page's policy forbids others. */
export function html<K extends keyof HTMLElementTagNameMap>(
  tag: K,
  attributes: Attributes = {},
  ...children: Children
): HTMLElementTagNameMap[K] {
  return fill(document.createElement(tag), attributes, children);
}

/** An SVG element with attributes and children. */
export function svg<K extends keyof SVGElementTagNameMap>(
  tag: K,
  attributes: Attributes = {},
  ...children: Children
): SVGElementTagNameMap[K] {
  return fill(document.createElementNS('http://www.w3.org/2000/svg', tag), attributes, children);
}

/** A word that does something. */
export function wordButton(text: string, act: () => void, attributes: Attributes = {}): HTMLButtonElement {
  const button = html('button', { type: 'button', class: 'word', ...attributes }, text);
  button.addEventListener('click', act);
  return button;
}

/** Rows of name and value, as a description list; a null value leaves its row out. */
export function rows(pairs: readonly (readonly [name: string, value: string | Node | null])[]): HTMLDListElement {
  const list = html('dl', { class: 'rows' });
  for (const [name, value] of pairs) if (value !== null) list.append(html('dt', {}, name), html('dd', {}, value));
  return list;
}

/** The page's own element of that id. */
export function byId<T extends Element = HTMLElement>(id: string): T {
  const element = document.querySelector<T>(`#${id}`);
  if (!element) throw new Error(`the page has no element #${id}`);
  return element;
}

/** Follows a pointer that went down on `element` until it is lifted; `move` gets the event and the way since the last. */
export function onDrag(
  element: Element,
  handlers: {
    readonly start?: (event: PointerEvent) => void;
    readonly move: (event: PointerEvent, dx: number, dy: number) => void;
    readonly end?: (event: PointerEvent) => void;
  },
): void {
  element.addEventListener('pointerdown', (down) => {
    const first = down as PointerEvent;
    if (first.button !== 0) return;
    element.setPointerCapture(first.pointerId);
    let [x, y] = [first.clientX, first.clientY];
    const move = (event: Event): void => {
      const now = event as PointerEvent;
      if (now.pointerId !== first.pointerId) return;
      handlers.move(now, now.clientX - x, now.clientY - y);
      [x, y] = [now.clientX, now.clientY];
    };
    const end = (event: Event): void => {
      if ((event as PointerEvent).pointerId !== first.pointerId) return;
      for (const name of ['pointerup', 'pointercancel']) element.removeEventListener(name, end);
      element.removeEventListener('pointermove', move);
      handlers.end?.(event as PointerEvent);
    };
    element.addEventListener('pointermove', move);
    for (const name of ['pointerup', 'pointercancel']) element.addEventListener(name, end);
    handlers.start?.(first);
  });
}

function fill<T extends Element>(element: T, attributes: Attributes, children: Children): T {
  for (const [name, value] of Object.entries(attributes)) element.setAttribute(name, String(value));
  element.append(...children);
  return element;
}
