/** A small set of findings, written by hand: two groups, five grid points, visits off the grid. */

const points = (time, mean) => ({
  time,
  mean,
  se: mean.map(() => 1),
  lower: mean.map((value) => (value === null ? null : value - 2)),
  upper: mean.map((value) => (value === null ? null : value + 2)),
  response_mean: mean,
  response_lower: mean.map((value) => (value === null ? null : value - 2)),
  response_upper: mean.map((value) => (value === null ? null : value + 2)),
});

const gaps = (time, estimate) => {
  const { mean, response_mean: response, ...rest } = points(time, estimate);
  return { ...rest, estimate: mean, response_estimate: response };
};

const GRID = [0, 2.5, 5, 7.5, 10];
const VISITS = [0, 3, 10];

export function findings({ start = 4.2, status = 'converged', headline = 'B runs above A.' } = {}) {
  return {
    version: '0', rows: 30, subjects: 10,
    columns: { subject: 'id', time: 'day', group: 'arm', response: 'size', cluster: null, reasons: [] },
    problems: [],
    fit: { status, remarks: status === 'failed' ? ['No optimum was found.'] : [] },
    curves: [
      { group: 'A', ...points(GRID, [10, 11, 12, 12, 12]), critical: 2.5, support: [0, 10], at_visits: points(VISITS, [10, 11.2, 12]) },
      { group: 'B', ...points(GRID, [9, 12, 15, 18, 21]), critical: 2.5, support: [0, 10], at_visits: points(VISITS, [9, 12.6, 21]) },
    ],
    differences: [{
      from: 'A', to: 'B', ...gaps(GRID, [-1, 1, 3, 6, 9]), critical: 2.5, support: [0, 10], margin: [-4, 4],
      stretches: [{ start, end: 10, direction: 'above', open_start: false, open_end: true }],
      beyond: [{ start: 7, end: 10, direction: 'above', open_start: false, open_end: true }],
      inside: [{ start: 1, end: 2.6, open_start: false, open_end: false }],
      at_visits: gaps(VISITS, [-1, 1.4, 9]),
    }],
    notes: [], plan: null,
    groups: [
      { name: 'A', subjects: 5, rows: 15, last_times: [3, 3, 10, 10, 10], at_visit: [5, 5, 3] },
      { name: 'B', subjects: 5, rows: 15, last_times: [10, 10, 10, 10, 10], at_visit: [5, 5, 5] },
    ],
    visits: VISITS,
    scale: { time_word: 'day', response: 'size', ratio: false },
    sentences: [{ kind: 'gap', pair: 0, headline, text: `Shown apart from day ${start}.`, depends: '10 mice' }],
  };
}
