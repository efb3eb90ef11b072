/** `E_g` with its subscript lowered. */
export function Subscripts({ text }: { readonly text: string }) {
  return text
    .split(/(_[\p{L}\p{N}])/u)
    .map((part, i) => (part.startsWith("_") ? <sub key={i}>{part.slice(1)}</sub> : part));
}
