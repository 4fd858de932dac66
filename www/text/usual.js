/** Words of the room Usual analyses. */

export const usual = {
  title: 'What reviewers know, on the same rows',
  lead: 'Each of these answers a narrower question than the courses do. Say which one was asked for, copy its sentence, and see where it parts from the courses and why.',
  jump: 'Asked for',
  waiting: 'These appear when the table has been fitted.',
  working: 'Computing the usual analyses \u2026',
  failed: 'The usual analyses could not be computed.',
  assumes: 'Assumes',
  bears: 'Do the data bear it?',
  verdicts: { yes: 'Nothing speaks against it.', doubtful: 'Doubtful.', no: 'No.', unknown: 'It could not be checked.' },
  beside: 'Beside the courses',
  agrees: 'says the same as the courses',
  disagrees: 'parts from the courses',
  incomparable: 'cannot be laid beside the courses',
  notDone: 'not possible here',
  copy: 'Copy the sentence',
  copied: 'Copied',
  copyRefused: 'The browser refused to copy. The sentence is selected: copy it with the keyboard.',
  numbers: 'All its numbers',
  /** @param {string} subjects @param {string} rows */
  uses: (subjects, rows) => `Uses ${subjects} and ${rows}.`,
  /** @param {string} subjects @param {string} rows */
  drops: (subjects, rows) => `Leaves out ${subjects} with ${rows}.`,
  lane: {
    curves: 'courses apart',
    here: 'apart here',
    /** @param {string} pair @param {string} sentence */
    label: (pair, sentence) => `${pair}: ${sentence}`,
    both: 'in both',
    onlyHere: 'here only',
    onlyCurves: 'in the courses only',
    none: 'no day is called apart',
  },
  lines: {
    lay: 'Lay these lines over the courses strip',
    label: 'Straight lines over the curved courses with their bands: where a line leaves its band, it misses.',
    title: 'Straight lines (dashed) over the courses (with bands)',
  },
};
