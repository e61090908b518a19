/** The part of js-quantities that is used here; the package carries no types. */
declare module 'js-quantities/esm' {
  interface Quantity {
    readonly scalar: number;
    kind(): string;
    to(unit: string): Quantity;
  }
  /** @throws Error when the text is no quantity */
  export default function Qty(text: string): Quantity;
}
