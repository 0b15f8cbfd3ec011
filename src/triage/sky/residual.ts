/** Least squares of an image by templates, and what they leave. */
import { cholesky, solveCholesky } from "../linear.ts";
import { addTo, dot, type Template, wholeTemplate } from "./patch.ts";

/** Takes a set of templates out of images of one size. Pixels without a value count nowhere. */
export class Projector {
  readonly width: number;
  readonly height: number;
  private readonly known: Uint8Array;
  private readonly templates: readonly Template[];
  private readonly lower: Float64Array;

  constructor(templates: readonly Template[], known: Uint8Array, width: number, height: number) {
    this.width = width;
    this.height = height;
    this.known = known;
    this.templates = templates.map((template) => masked(template, known, width));
    const n = templates.length;
    const matrix = new Float64Array(n * n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        matrix[i * n + j] = dot(this.templates[i]!, this.templates[j]!);
        matrix[j * n + i] = matrix[i * n + j]!;
      }
    }
    this.lower = cholesky(matrix, n);
  }

  /** The coefficients of the templates in an image, and the image without them. */
  take(pixels: Float64Array): { readonly coefficients: Float64Array; readonly left: Float64Array } {
    const { width, height, known, templates } = this;
    const left = pixels.map((value, i) => (known[i] === 1 ? value : 0));
    const whole = wholeTemplate(left, width, height);
    const right = Float64Array.from(templates, (template) => dot(template, whole));
    const coefficients = solveCholesky(this.lower, right);
    templates.forEach((template, i) => {
      addTo(left, width, template, -coefficients[i]!);
    });
    return { coefficients, left };
  }
}

function masked(template: Template, known: Uint8Array, imageWidth: number): Template {
  const values = template.values.slice();
  for (let y = 0, at = 0; y < template.height; y++) {
    const row = (template.y0 + y) * imageWidth + template.x0;
    for (let x = 0; x < template.width; x++, at++) if (known[row + x] === 0) values[at] = 0;
  }
  return { ...template, values };
}

/** Sum of products of two images. */
export function inner(one: Float64Array, other: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < one.length; i++) sum += one[i]! * other[i]!;
  return sum;
}
