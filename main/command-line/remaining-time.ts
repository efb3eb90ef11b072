/** A time to wait, rounded as far as it can be trusted: seconds in fives below a minute, then minutes, then hours. */
export function remainingInWords(seconds: number): string {
  if (seconds < 5) return "a few seconds";
  if (seconds < 57.5) return `about ${5 * Math.round(seconds / 5)} s`;
  const minutes = Math.round(seconds / 60);
  if (minutes < 60) return `about ${minutes} min`;
  const hours = Math.floor(minutes / 60);
  return `about ${hours} h ${minutes % 60} min`;
}
