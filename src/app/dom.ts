/**
 * An element with properties and children. Properties that are not the element's own (`aria-…`, `role`, `for`) become
 * attributes; texts become text nodes, so nothing a scenario holds is ever read as markup.
 */
export function h<Tag extends keyof HTMLElementTagNameMap>(
  tag: Tag,
  properties: Readonly<Record<string, unknown>> = {},
  ...children: (Node | string | null)[]
): HTMLElementTagNameMap[Tag] {
  const element = document.createElement(tag);
  for (const [name, value] of Object.entries(properties)) {
    if (name in element) (element as unknown as Record<string, unknown>)[name] = value;
    else element.setAttribute(name, String(value));
  }
  element.append(...children.filter((child) => child !== null));
  return element;
}

/** The element with this id, which the page has. */
export function byId<E extends HTMLElement = HTMLElement>(id: string): E {
  return document.getElementById(id) as E;
}
