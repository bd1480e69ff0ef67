// @ts-check
/**
 * Refused: the one kind of error that the tablet's plumbing throws on purpose.
 *
 * `code` is a kebab-case word and an API; `says` is a whole sentence for the person. Anything else that is
 * thrown is a fault of this program. To add a code: use it where the bad thing is met.
 */

export class Refused extends Error {
  /**
   * @param {string} code
   * @param {string} says
   * @param {Record<string, unknown>} [more] further fields, such as wait_s
   */
  constructor(code, says, more = {}) {
    super(`${code}: ${says}`);
    this.name = "Refused";
    this.code = code;
    this.says = says;
    Object.assign(this, more);
  }
}

/**
 * The code and sentence of anything that was thrown.
 * @param {unknown} bad
 * @returns {{code: string, says: string}}
 */
export function told(bad) {
  if (bad instanceof Refused) return { code: bad.code, says: bad.says };
  if (bad instanceof Error) return { code: "fault", says: `Something failed inside this page: ${bad.name}, ${bad.message}.` };
  return { code: "fault", says: `Something failed inside this page: ${String(bad)}.` };
}
