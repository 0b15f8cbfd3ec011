/** One YAML document from a stranger, with the line and column of each of its values. */
import {
  type Document,
  isMap,
  isNode,
  isPair,
  isScalar,
  LineCounter,
  type Node,
  parseDocument,
  Scalar,
  visit,
} from "yaml";
import { InputError, type Place } from "../util/errors.ts";

const ADVICE = 'Correct the file; a text with ": " or " #" in it needs quotes';

/** A path into a document: keys and indices. */
export type Path = readonly (string | number)[];

export class YamlDocument {
  /** plain values: maps, lists, texts, numbers, booleans, null */
  readonly value: unknown;
  private readonly file: string;
  private readonly lines = new LineCounter();
  private readonly root: Node | null;

  /**
   * @param file as the user gave it, for errors
   * @throws InputError at the line and column where the text is no YAML, or uses anchors, tags or several documents
   */
  constructor(text: string, file: string) {
    this.file = file;
    const document = parse(text, this.lines, file);
    const error = document.errors[0] ?? document.warnings[0];
    if (error !== undefined) {
      throw new InputError(`not YAML: ${error.message}`, this.placeAt(error.pos[0]), ADVICE);
    }
    this.root = document.contents;
    // Without anchors a document cannot grow when it is read.
    visit(document, {
      Alias: (_, node) => this.refuse("an alias", node),
      Value: (_, node) => (node.anchor === undefined ? undefined : this.refuse("an anchor", node)),
    });
    this.value = document.toJS({ maxAliasCount: 0 });
  }

  /** Of a value, or the nearest value around it that exists. */
  place(path: Path): Place {
    const node = this.nodeAt(path);
    return node?.range == null ? { file: this.file } : this.placeAt(node.range[0]);
  }

  /** Of a key of the map at `path`. */
  keyPlace(path: Path, key: string): Place {
    const map = this.nodeAt(path);
    if (isMap(map)) {
      for (const pair of map.items) {
        if (isPair(pair) && isScalar(pair.key) && String(pair.key.value) === key && pair.key.range != null) {
          return this.placeAt(pair.key.range[0]);
        }
      }
    }
    return this.place(path);
  }

  /** Of a character of the text at `path`: exact in a text on one line, otherwise where the text begins. */
  characterPlace(path: Path, at: number): Place {
    const node = this.nodeAt(path);
    if (!isScalar(node) || node.range == null) return this.place(path);
    const begin = node.range[0];
    if (
      node.type !== Scalar.PLAIN &&
      node.type !== Scalar.QUOTE_DOUBLE &&
      node.type !== Scalar.QUOTE_SINGLE
    ) {
      return this.placeAt(begin);
    }
    const source = node.source ?? "";
    const quoted = node.type !== Scalar.PLAIN;
    const verbatim = node.range[1] - begin === source.length + (quoted ? 2 : 0);
    return this.placeAt(verbatim ? begin + (quoted ? 1 : 0) + at : begin);
  }

  private refuse(what: string, node: Node): never {
    const place = node.range == null ? { file: this.file } : this.placeAt(node.range[0]);
    throw new InputError(`${what} is not used here`, place, "Write the value out");
  }

  private placeAt(offset: number): Place {
    const { line, col } = this.lines.linePos(offset);
    return { file: this.file, line, column: col };
  }

  private nodeAt(path: Path): Node | null {
    let node: unknown = this.root;
    let last: Node | null = this.root;
    for (const step of path) {
      node =
        isNode(node) && "get" in node
          ? (node as { get(key: unknown, keep: true): unknown }).get(step, true)
          : null;
      if (!isNode(node)) break;
      last = node;
    }
    return last;
  }
}

function parse(text: string, lineCounter: LineCounter, file: string): Document.Parsed {
  try {
    return parseDocument(text, {
      lineCounter,
      schema: "core",
      version: "1.2",
      uniqueKeys: true,
      prettyErrors: false,
      logLevel: "silent",
    });
  } catch (error) {
    // Brackets nested by the thousand use up the stack.
    throw new InputError("not YAML that can be read", { file }, "Correct the file", { cause: error });
  }
}
