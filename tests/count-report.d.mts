export function countReport(report: unknown): { passed: number; failed: number; skipped: number };
