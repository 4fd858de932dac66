/** Words of the part of Report that takes one plan over many response columns. */

export const markers = {
  title: 'The same plan for other columns',
  lead: 'For a panel of markers: every ticked column takes the place of the response, and what is found is held to a false-discovery rate over all of them.',
  columns: 'Response columns',
  rate: 'False-discovery rate, percent',
  none: 'The table has no other column of numbers that could be the response.',
  run: 'Go through the columns',
  stop: 'Stop',
  all: 'all',
  nothing: 'none',
  progress: (/** @type {number} */ done, /** @type {number} */ total) => `${done} of ${total} columns done`,
  stopped: 'Stopped. Nothing is shown, because what is found depends on all columns together.',
  few: 'Tick two columns at least.',
  badRate: 'Give a rate above 0 and below 50 percent.',
  old: 'The plan or the columns have changed since: go through them again.',
  asCsv: 'Save as CSV',
  asXlsx: 'Save as XLSX',
  choice: 'Columns to go through',
};
