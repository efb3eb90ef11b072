import { describe, expect, it } from "vitest";
import { wordTableIssue } from "../../../app/table/index.ts";
import { issueOf } from "./reading.ts";

describe("what is no table is refused where it stands", () => {
  it("cells with a unit or a per cent sign are named with their line", () => {
    const issue = issueOf("E;T\n2,1;50 %\n2,2;40 %\n");
    expect(issue.code).toBe("table/only-text");
    expect(issue.facts).toMatchObject({
      file: "test.csv",
      line: 2,
      found: '"50 %" in column 2 where a number should be',
    });
    expect(wordTableIssue(issue).remedy).toMatch(/heading/);
  });

  it("a remark behind the number is named where it first stands", () => {
    const issue = issueOf("E,T\n2.1,0.5  ; ok\n2.2,0.4  ; ok\n");
    expect(issue.facts).toMatchObject({
      line: 2,
      found: '"0.5 ; ok" in column 2 where a number should be',
    });
  });

  it("two decimal marks in one row are named with both cells", () => {
    const issue = issueOf("E;T\n2.1;0,5\n2.2;0,4\n");
    expect(issue.facts).toMatchObject({ line: 2 });
    expect(issue.facts["found"]).toMatch(/"2\.1" with a decimal point .* "0,5" with a decimal comma/);
    expect(wordTableIssue(issue).remedy).toMatch(/same decimal mark/);
  });

  it("sentences with commas and numbers are text", () => {
    expect(issueOf("hello, world\nthis, is\nnot 3, a 4\n").code).toBe("table/only-text");
  });

  it("a chosen delimiter that the file does not use is refused with the remedy", () => {
    const issue = issueOf("E,T\n2.1,0.5\n2.2,0.4\n", { delimiter: ";" });
    expect(issue.code).toBe("table/only-text");
    expect(wordTableIssue(issue).remedy).toMatch(/delimiter and the decimal mark/);
  });

  it("a header line that does not exist, or has no rows below it, is refused", () => {
    const text = "E,T\n2.1,0.5\n2.2,0.4\n";
    expect(issueOf(text, { headerLine: 9 })).toMatchObject({
      code: "table/no-such-line",
      facts: { line: null },
    });
    expect(issueOf(text, { headerLine: 3 })).toMatchObject({
      code: "table/no-such-line",
      facts: { line: 3 },
    });
  });
});
