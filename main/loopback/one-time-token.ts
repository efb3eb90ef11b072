import { createHash, randomBytes, timingSafeEqual } from "node:crypto";

/** Secrets that let one browser in: a token works once and is exchanged for the session, which never leaves a cookie. */
export interface Gate {
  /** A new token for a printed address. */
  issue(): string;
  /** Whether the token was alive; it is dead afterwards. */
  redeem(token: string): boolean;
  readonly session: string;
  isSession(candidate: string): boolean;
}

export function makeGate(): Gate {
  const session = secret();
  const alive = new Set<string>();
  return {
    issue() {
      const token = secret();
      alive.add(token);
      return token;
    },
    redeem(token) {
      for (const one of alive) {
        if (sameText(one, token)) return alive.delete(one);
      }
      return false;
    },
    session,
    isSession: (candidate) => sameText(session, candidate),
  };
}

function secret(): string {
  return randomBytes(32).toString("base64url");
}

/** Compared by digest, so that neither time nor length tells how much was right. */
function sameText(a: string, b: string): boolean {
  const digest = (text: string): Buffer => createHash("sha256").update(text).digest();
  return timingSafeEqual(digest(a), digest(b));
}
