/**
 * Words of "Check this copy".
 */

export const copyCheck = {
  open: 'Check this copy',
  title: 'Check this copy',
  lead: 'Computes invented examples in this browser and holds the numbers to those that the native program found when this copy was made. Print the table for your file.',
  none: 'This page carries no reference cases. Copies made for giving away do: the folder and the single file.',
  working: (/** @type {number} */ done, /** @type {number} */ total) => `Computing case ${done + 1} of ${total} …`,
  agrees: (/** @type {number} */ cases, /** @type {number} */ numbers) =>
    `This copy computes as it should: all ${numbers} numbers of ${cases} cases agree to 10\u207b\u2079 of their size.`,
  differs: (/** @type {number} */ cases, /** @type {number} */ all) =>
    `${cases} of ${all} cases do not agree. Do not rely on findings from this copy in this browser; get the copy anew, or try another browser, and keep this table.`,
  altered: 'The computing module is not the one that this copy was made with. Get the copy anew.',
  facts: { version: 'Version', digest: 'Computing module, SHA-256', browser: 'Browser', when: 'Checked' },
  version: (/** @type {string} */ here, /** @type {string} */ made) => (here === made ? here : `${here}; the cases are of ${made}`),
  same: 'as it was made',
  other: (/** @type {string} */ expected) => `expected ${expected}`,
  noDigest: 'not computed: this browser gives checksums to pages on https, localhost or a disk only',
  heads: { name: 'Case', numbers: 'Numbers', example: 'For example', expected: 'Expected', got: 'Got here', worst: 'Largest relative difference', agrees: 'Agrees to 10\u207b\u2079' },
  gap: (/** @type {string[]} */ pair, /** @type {string} */ time) => `gap ${pair.join(' against ')}, last visit (${time})`,
  yes: 'yes',
  no: 'no',
  zero: 'none',
  nothing: 'nothing',
  caption: 'Cases, with one number of each',
  print: 'Print',
  copyWords: { copy: 'Copy as text', copied: 'Copied.', copyRefused: 'Selected: copy it with the keyboard.' },
  close: 'Close',
};
