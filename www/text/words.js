/**
 * The page's own words, each with its trade term and formula.
 */

/** @type {{word: string, term: string, meaning: string}[]} */
export const words = [
  {
    word: 'gap',
    term: 'Difference of group means at one time; on the log scale, ratio of geometric means.',
    meaning: 'd(t) = m\u2082(t) \u2212 m\u2081(t), with standard error s(t).',
  },
  {
    word: 'apart',
    term: 'The simultaneous confidence band of the gap excludes zero.',
    meaning: '|d(t)| > c \u00b7 s(t), with c the quantile of the largest |d \u2212 \u03b4| / s over all times and pairs.',
  },
  {
    word: 'beyond',
    term: 'The band of the gap lies wholly outside the margin.',
    meaning: 'd(t) \u2212 c \u00b7 s(t) > margin, or d(t) + c \u00b7 s(t) < \u2212margin.',
  },
  {
    word: 'inside',
    term: 'The band of the gap lies wholly within the margin (equivalence at this time).',
    meaning: '\u2212margin < d(t) \u2212 c \u00b7 s(t) and d(t) + c \u00b7 s(t) < margin.',
  },
  {
    word: 'undecided',
    term: 'None of the three: the band reaches over zero or a margin.',
    meaning: 'The data neither show nor rule out a gap. It does not mean that there is none.',
  },
  {
    word: 'followed',
    term: 'Number at risk, counted by visits.',
    meaning: 'Subjects with a visit at this time or later.',
  },
  {
    word: 'whole course',
    term: 'Simultaneous over time and pairs: the family-wise error rate is held.',
    meaning: 'The chance that all bands hold everywhere at once is the stated level, not the chance at one time.',
  },
];
