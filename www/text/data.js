/**
 * Words of the Data room.
 */

export const data = {
  title: 'Data',
  paste: {
    title: 'Your table',
    label: 'Paste the table here, header row included',
    hint: 'Copy the cells in your spreadsheet and paste them. Long or wide, gaps and decimal commas are fine. Or drop a text file anywhere on this page.',
    choose: 'Choose a file',
    drop: 'Drop the file to read it',
    example: 'mouse\tgroup\tday\tarea\nm1\tSaline\t0\t52.1\nm1\tSaline\t3\t47.8\n\u2026',
    workbook: (/** @type {string} */ name) => `${name} is a workbook. Open it, select the cells with the table, copy, and paste here.`,
    unreadable: (/** @type {string} */ name) => `${name} could not be read from the disk. Choose it again.`,
  },
  demos: {
    title: 'Invented examples',
    open: 'Open',
    none: 'No example could be loaded. Paste a table of your own.',
    isOpen: 'open now',
  },
  pastedName: 'Pasted table',
  table: {
    title: 'As it was read',
    role: (/** @type {string} */ column) => `Role of ${column}`,
    called: (/** @type {string} */ column) => `Short name for ${column}`,
    calledShort: 'called',
    line: 'line',
    roles: {
      subject: 'subject', time: 'time', group: 'group', response: 'response', cluster: 'cage or site', unused: 'not used',
    },
    roleHint: {
      subject: 'Who was measured.', time: 'When.', group: 'In which group.', response: 'What was measured.',
      cluster: 'Cage, litter or site.', unused: '',
    },
    shown: (/** @type {number} */ shown, /** @type {number} */ all) => `First ${shown} of ${all} rows.`,
    all: (/** @type {number} */ all) => `All ${all} rows.`,
    more: 'Show more rows',
    caption: 'The table as it was read. A list under each column head sets its role.',
  },
  problems: {
    title: 'Problems by row',
    none: 'Nothing stood out.',
    where: (/** @type {number} */ row, /** @type {string} */ column) => (column ? `Line ${row}, ${column}` : `Line ${row}`),
    leaveOut: 'leave this row out',
    leaveOutLabel: (/** @type {number} */ row) => `Leave line ${row} out`,
    more: (/** @type {number} */ count) => `${count} more`,
    reason: 'Why? The reason stays in the record.',
    confirm: 'Leave it out',
    cancel: 'Keep it',
    any: 'Leave another row out',
    line: 'Line',
  },
  leftOut: {
    title: 'Rows left out',
    seen: 'after findings were seen',
    before: 'before findings were seen',
    takeBack: 'take back in',
    label: (/** @type {number} */ row) => `Line ${row} left out`,
    back: (/** @type {number} */ row) => `Line ${row} taken back in`,
  },
  question: { title: 'One question first', reopen: 'Asked and answered; change it through the roles under the column heads.' },
  description: {
    title: 'By group and visit',
    group: 'Group', time: 'Time', n: 'n', mean: 'Mean', sd: 'SD', median: 'Median',
    caption: 'Count, mean, standard deviation and median of the response, as measured.',
    none: 'Filled when the roles are clear.',
  },
  noun: { title: 'Wording', label: 'One of those followed is called a', many: 'several are' },
  next: 'See the time courses',
  notes: 'How it was read',
  labels: {
    role: (/** @type {string} */ column, /** @type {string} */ role) => `${column}: ${role}`,
    called: (/** @type {string} */ column, /** @type {string} */ name) => `${column} called ${name}`,
    answered: 'Question answered',
    noun: (/** @type {string} */ noun) => `Subjects called ${noun}`,
  },
};
