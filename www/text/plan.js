/**
 * Words of the plan: its three lines, and each choice's alternatives with a
 * line on when it fits.
 */

export const plan = {
  title: 'Plan',
  lines: { followed: 'Followed', vary: 'Subjects vary', compared: 'Compared' },
  finer: 'finer choices',
  coarser: 'fewer choices',
  undo: 'Undo',
  redo: 'Redo',
  close: 'Close',
  fold: 'Plan',
  /** @param {string} control @param {number} pairs @param {number} fewer */
  propose: (control, pairs, fewer) =>
    `${control} is named like a control. All ${pairs} pairs at once make every band wider; with ${control} there are ${fewer}.`,
  proposeAct: (/** @type {string} */ control) => `Compare each with ${control}`,
  marginLost: 'The margin was set aside: it has a meaning on the other scale only',

  by: ' by ',
  aCourse: ', a ',
  coursePer: ' course per ',
  oneCourse: ' course, ',
  onScale: ', on ',
  scaleEnd: ' scale',
  bends: '; bends ',
  smoothness: '; smoothness ',
  each: 'each ',
  has: ' has ',
  otherwise: '; visits otherwise ',
  spread: '; spread ',
  vary: '; courses vary ',
  start: '; first values ',
  adjusted: '; adjusted for ',
  /** @param {string} column */
  eachCluster: (column) => `; each ${column} has `,
  and: ' and ',
  gapUnder: '; a gap under ',
  gapOf: '; a gap of ',
  noMatter: ' does not matter; ',
  anyMatters: ' matters; ',
  bandsHold: ' bands that hold ',
  small: '; small samples ',
  nothingCompared: 'nothing: there is one group; ',
  ratio: (/** @type {string} */ low, /** @type {string} */ high) => ` (ratio ${low} to ${high})`,

  choices: {
    response: { label: 'What was measured', none: 'response' },
    time: { label: 'When', none: 'time' },
    group: { label: 'Groups', none: 'no group', absent: 'No group: one course', absentFits: 'One course for all; nothing is compared.' },
    shape: {
      label: 'Shape of the course',
      smooth: ['curved', 'A smooth curve, as bent as the data ask for. Fits most courses with four visits or more.'],
      straight: ['straight', 'One straight line per group. Fits a short span or a steady change; a bend would be missed.'],
      'by-time': ['visit-by-visit', 'A mean of its own at every visit, nothing assumed between them. Fits three or four visits that all share.'],
    },
    dimension: {
      label: 'Room to bend',
      auto: ['as the data ask', 'A knot at every visit time, up to 20. Bending is held back by the data. Fits nearly always.'],
      full: ['a knot at every time', 'As much room as there is. Slower with many times; shows whether 20 knots were enough.'],
      number: 'Number of knots, ends included (3 or more)',
      written: (/** @type {number} */ count) => `${count} knots`,
    },
    smoothness: {
      label: 'Smoothness',
      'per-group': ['of its own in each group', 'One group may bend while another runs straight. Fits most tables.'],
      shared: ['shared by the groups', 'All groups bend alike. Fits few subjects per group.'],
    },
    scale: {
      label: 'Scale',
      identity: ['the measured', 'Gaps are differences in the unit of the table. Fits when the spread stays alike as values change.'],
      log: ['a log', 'Gaps are ratios, lines are geometric means. Fits values that grow or shrink by factors.'],
      /** @param {string} rows @param {number} count */
      greyed: (rows, count) =>
        `Not possible: ${count === 1 ? 'line' : 'lines'} ${rows} ${count === 1 ? 'holds' : 'hold'} zero or less. No constant is added.`,
    },
    noun: {
      label: 'What a subject is called',
      one: 'One',
      many: 'Several',
      fits: 'Only the wording changes.',
      default: { one: 'subject', many: 'subjects' },
    },
    start: {
      label: 'Values at the first time',
      'as-measured': ['as measured', 'They are part of the course, and groups may start apart. Fits most tables.'],
      common: ['common to all groups', 'They are part of the course, and all groups have one mean then. Fits groups made by chance, measured before treatment.'],
      covariate: ['taken as an explanatory value', 'Later values are compared at equal starts. Fits groups made by chance; assumes that the start acts alike in all.'],
      change: ['subtracted', 'Courses are changes since the start (on a log scale: ratios to it). Simple to read; chance in the start goes into every value.'],
      percent: ['as 100 percent', 'Courses are percent changes since the start. Fits only starts far above zero that are measured well.'],
      percentGreyed: 'On the log scale the subtracted start is the ratio to it.',
    },
    covariates: {
      label: 'Adjusted for',
      none: 'nothing',
      noneFits: 'Courses of all subjects as they are.',
      add: 'Add: a number acts as a straight line, a word as a category, alike in every group and at every time.',
      away: 'In use: choose again to take it away.',
    },
    clusters: {
      label: 'Clusters',
      auto: ['as the table bears', 'Level and trend where each is in one group and there are enough of them, else the level.'],
      slope: ['a level and trend of its own', 'Fits treatment given by the cluster: it is then the unit that is compared.'],
      intercept: ['a level of its own', 'Fits clusters that hold every group, such as two wounds on one animal, or few clusters.'],
      none: ['no part', 'Subjects of one cluster are independent. Bands are too narrow where treatment is given by the cluster.'],
    },
    subjects: {
      label: 'Subjects',
      curve: ['its own curve', 'Each bends in its own way around its group\u2019s course. Fits many visits, and subjects that wander for a while.'],
      curveGreyed: 'Not beside visits that are alike when close in time: the two cannot be told apart.',
      slope: ['its own level and trend', 'Each starts at its own level and changes at its own pace. Fits most studies with several visits.'],
      intercept: ['its own level', 'Each runs beside its group\u2019s course at a steady distance. Fits few visits.'],
      none: ['no course of its own', 'Each follows its group\u2019s course. Fits only when nobody is measured twice, or when close visits are alike.'],
    },
    serial: {
      label: 'Visits of one subject',
      none: ['independent', 'What is left over at one visit says nothing about the next. Fits visits far apart.'],
      ar1: ['alike when close in time', 'Likeness fades as visits lie further apart (AR(1) in continuous time). Fits frequent visits.'],
      ar1Greyed: 'Not beside subjects with curves of their own, unless with measurement error.',
      'ar1-nugget': ['alike when close in time, plus measurement error', 'The same, and each reading has an error of its own. Fits noisy instruments; needs many visits.'],
    },
    spread: {
      label: 'Spread around the courses',
      common: ['the same in every group', 'One residual standard deviation. Fits when the residuals look alike.'],
      'by-group': ['of its own in each group', 'One residual standard deviation per group. Fits when a treatment changes how much readings scatter.'],
    },
    subjects_spread: {
      label: 'How much courses vary',
      common: ['alike in every group', 'One covariance of levels and trends. Fits most tables.'],
      'by-group': ['by their own amount in each group', 'A covariance per group. Needs some ten subjects in each.'],
    },
    pairs: {
      label: 'Pairs',
      all: (/** @type {number} */ count) => (count === 1 ? 'the two groups' : `every pair of groups`),
      allFits: (/** @type {number} */ count) =>
        count === 1 ? 'One pair.' : `${count} pairs at once. Fits when no group is the one to compare with; every pair widens the bands.`,
      with: (/** @type {string} */ control) => `each with ${control}`,
      withFits: (/** @type {number} */ count, /** @type {string} */ control) =>
        count === 1 ? `One pair, read as the other group against ${control}.` : `${count} pairs at once. Fits when ${control} is the control.`,
    },
    margin: {
      label: 'Largest gap that does not matter',
      none: 'any size',
      size: 'Size',
      unit: 'Unit',
      response: (/** @type {string} */ unit) => `in the unit of ${unit}`,
      percent: 'percent of the other group',
      percentGreyed: 'Percent needs the log scale.',
      unitGreyed: 'On the log scale a gap is a ratio: give the margin in percent.',
      fits: 'Set it before looking, from what would change a decision. 0: every gap matters.',
      ofOther: 'the other group',
      written: (/** @type {string} */ size, /** @type {string} */ of) => `${size}\u00a0% of ${of}`,
      tooLarge: 'Give a size of 0 or more; in percent, under 100.',
    },
    level: {
      label: 'Level',
      95: 'The custom in most fields.',
      90: 'Narrower bands that fail one time in ten. Fits a first look.',
      99: 'Wider bands that fail one time in a hundred.',
      number: 'Another level, in percent',
      tooLarge: 'Give a level between 50 and 99.99.',
    },
    band: {
      label: 'What the bands promise',
      simultaneous: 'over the whole course',
      simultaneousPairs: (/** @type {number} */ pairs) =>
        `over the whole course and ${pairs === 2 ? 'both pairs' : `all ${pairs} pairs`} at once`,
      simultaneousFits: 'Fits the question when groups come apart: the day is looked for, so every day counts.',
      pointwise: 'at each day by itself',
      pointwiseFits: 'Fits one day fixed beforehand. Read over the whole course, it shows gaps too often.',
    },
    small_sample: {
      label: 'Small samples',
      auto: ['allowed for', 'Bands widen with the degrees of freedom left. Fits always.'],
      none: ['not allowed for', 'Normal theory. Fits a comparison with programs that do the same; too narrow with few subjects.'],
    },
  },
};
