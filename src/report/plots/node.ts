/** The little of a document that our own marks need, in one or another implementation. */

export interface SvgNode {
  setAttribute(name: string, value: string): void;
  appendChild(child: SvgNode): unknown;
  textContent: string | null;
}

export interface SvgDocument {
  createElementNS(namespace: string, name: string): SvgNode;
}

/** An SVG element. Attribute values are ours, never text from a file: they are not escaped. */
export function node(
  document: SvgDocument,
  name: string,
  attributes: Readonly<Record<string, string | number>>,
  children: readonly SvgNode[] | string = [],
): SvgNode {
  const element = document.createElementNS("http://www.w3.org/2000/svg", name);
  for (const [key, value] of Object.entries(attributes)) element.setAttribute(key, String(value));
  if (typeof children === "string") element.textContent = children;
  else for (const child of children) element.appendChild(child);
  return element;
}
