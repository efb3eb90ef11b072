import { useId, useState, type ReactNode } from "react";
import { parseNumber } from "./parse-number.ts";

/** The protocol is written as a sentence; its underlined words are the choices. */
export function Sentence({ children, label }: { readonly children: ReactNode; readonly label: string }) {
  return (
    <div className="sentence" role="group" aria-label={label}>
      {children}
    </div>
  );
}

/** A clause stays together when the sentence is broken into lines. */
export function Clause({ children }: { readonly children: ReactNode }) {
  // The space lets the line break here also where text meets text.
  return (
    <>
      <span className="clause">{children}</span>{" "}
    </>
  );
}

interface PickProps<T extends string> {
  readonly label: string;
  readonly value: T;
  readonly options: readonly { readonly value: T; readonly text: string }[];
  readonly onPick: (value: T) => void;
  readonly disabled?: boolean;
}

export function Pick<T extends string>({ label, value, options, onPick, disabled }: PickProps<T>) {
  return (
    <select
      className="pick"
      aria-label={label}
      title={label}
      value={value}
      disabled={disabled}
      onChange={(event) => onPick(event.target.value as T)}
    >
      {options.map((option) => (
        <option key={option.value} value={option.value}>
          {option.text}
        </option>
      ))}
    </select>
  );
}

interface AmountProps {
  readonly label: string;
  /** As shown; "" where nothing is chosen. */
  readonly value: string;
  readonly placeholder: string;
  readonly width: number;
  /** Returns what is wrong with the text, or null when it was taken. */
  readonly onCommit: (text: string) => string | null;
}

/** A typed amount: taken on Enter or on leaving, given back on Escape; what is wrong is said beside it. */
export function Amount({ label, value, placeholder, width, onCommit }: AmountProps) {
  const [draft, setDraft] = useState<string | null>(null);
  const [wrong, setWrong] = useState<string | null>(null);
  const id = useId();
  const commit = (): void => {
    if (draft === null) return;
    const said = draft.trim() === value ? null : onCommit(draft.trim());
    setWrong(said);
    if (said === null) setDraft(null);
  };
  return (
    <span className="amount">
      <input
        className="amount-field"
        aria-label={label}
        title={label}
        aria-invalid={wrong !== null || undefined}
        aria-describedby={wrong === null ? undefined : id}
        placeholder={placeholder}
        value={draft ?? value}
        size={width}
        spellCheck={false}
        autoComplete="off"
        onChange={(event) => setDraft(event.target.value)}
        onBlur={commit}
        onKeyDown={(event) => {
          if (event.key === "Enter") commit();
          if (event.key === "Escape") {
            setDraft(null);
            setWrong(null);
          }
        }}
      />
      {wrong !== null && (
        <span id={id} className="amount-wrong" role="alert">
          {wrong}
        </span>
      )}
    </span>
  );
}

interface NumberAmountProps {
  readonly label: string;
  /** In the unit that stands beside it; null: left open. */
  readonly value: number | null;
  readonly placeholder: string;
  readonly width?: number;
  readonly accept: (value: number) => boolean;
  /** What is expected, said where something else was typed. */
  readonly expected: string;
  readonly onTake: (value: number | null) => void;
}

/** An amount that is one number, or is left open. */
export function NumberAmount({
  label,
  value,
  placeholder,
  width,
  accept,
  expected,
  onTake,
}: NumberAmountProps) {
  return (
    <Amount
      label={label}
      value={value === null ? "" : String(value)}
      placeholder={placeholder}
      width={width ?? Math.max(4, placeholder.length)}
      onCommit={(text) => {
        const typed = parseNumber(text);
        if (text !== "" && (typed === null || !accept(typed))) return expected;
        onTake(typed);
        return null;
      }}
    />
  );
}

interface SegmentsProps<T extends string> {
  readonly label: string;
  readonly value: T;
  readonly options: readonly { readonly value: T; readonly text: string; readonly disabled?: boolean }[];
  readonly onPick: (value: T) => void;
}

/** A few ways to look at the same thing, one of them chosen. */
export function Segments<T extends string>({ label, value, options, onPick }: SegmentsProps<T>) {
  return (
    <div className="segments" role="group" aria-label={label}>
      {options.map((option) => (
        <button
          key={option.value}
          type="button"
          aria-pressed={option.value === value}
          disabled={option.disabled}
          onClick={() => onPick(option.value)}
        >
          {option.text}
        </button>
      ))}
    </div>
  );
}
