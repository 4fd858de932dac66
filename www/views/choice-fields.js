/**
 * The fields that some choices have beside their alternatives: a margin, a
 * level, a number of knots, names. They act while one types.
 */

import { contextOf } from '../context.js';
import { el, setText } from '../dom.js';
import { parseNumber, percentLevel } from '../numbers.js';
import { withSection } from '../plan.js';
import { text } from '../text.js';

/** @typedef {import('../types.js').State} State */
/** @typedef {import('../types.js').Acts} Acts */
/** @typedef {import('../alternatives.js').ChoiceId} ChoiceId */

const words = text.plan.choices;

/**
 * Mounts the fields of a choice, if it has any.
 * @param {ChoiceId} choice
 * @param {HTMLElement} root
 * @param {Acts} acts
 * @returns {{update: (state: State) => void}|null}
 */
export function mountField(choice, root, acts) {
  switch (choice) {
    case 'margin':
      return mountMargin(root, acts);
    case 'level':
      return mountLevel(root, acts);
    case 'basis':
      return mountBasis(root, acts);
    case 'dimension':
      return mountDimension(root, acts);
    case 'distribution':
      return mountTotal(root, acts);
    case 'also':
      return mountAlso(root, acts);
    case 'noun':
      return mountNoun(root, acts);
    case 'response':
    case 'time':
    case 'group':
      return mountCalled(choice, root, acts);
    default:
      return null;
  }
}

/**
 * A field that never fights the person who is typing in it.
 * @param {string} label
 * @param {Record<string, string>} attributes
 * @param {(value: string) => void} typed
 */
function field(label, attributes, typed) {
  const input = el('input', { type: 'text', autocomplete: 'off', spellcheck: 'false', ...attributes });
  input.addEventListener('input', () => typed(input.value));
  return {
    input,
    node: el('label', { class: 'field' }, el('span', {}, label), input),
    /** @param {string} value */
    show: (value) => {
      if (document.activeElement !== input) input.value = value;
    },
  };
}

/**
 * A field for a number that has to pass a test; a complaint stands beneath it.
 * @param {string} label
 * @param {string} complaint
 * @param {(value: number) => boolean} fits
 * @param {(value: number) => void} then
 * @param {string} name
 */
function numberField(label, complaint, fits, then, name) {
  const problem = el('p', { class: 'complaint', role: 'alert' });
  const made = field(label, { inputmode: 'decimal', 'data-field': name }, (typed) => {
    const value = parseNumber(typed);
    const good = value !== null && fits(value);
    made.input.setAttribute('aria-invalid', String(!good));
    setText(problem, good ? '' : complaint);
    if (good) then(value);
  });
  return { ...made, problem };
}

/** @param {HTMLElement} root @param {Acts} acts */
function mountMargin(root, acts) {
  let percent = false;
  const size = numberField(words.margin.size, words.margin.tooLarge,
    (value) => value >= 0 && (!percent || value < 100),
    (margin) => acts.choose(`${words.margin.label}: ${margin}${percent ? '\u00a0%' : ''}`, (choices) => ({
      ...choices,
      plan: withSection(choices.plan, 'comparisons', { margin, margin_unit: percent ? 'percent' : 'response' }),
    }), true), 'margin');
  const unit = el('select', { 'data-field': 'margin-unit' },
    el('option', { value: 'response' }), el('option', { value: 'percent' }, words.margin.percent));
  const why = el('p', { class: 'hint' });
  root.append(size.node, el('label', { class: 'field' }, el('span', {}, words.margin.unit), unit), size.problem, why,
    el('p', { class: 'hint' }, words.margin.fits));
  const [inResponse, inPercent] = Array.from(unit.options);
  return {
    /** @param {State} state */
    update(state) {
      const { plan } = state.choices;
      percent = plan.response.transform === 'log' || plan.response.distribution !== 'normal';
      unit.value = percent ? 'percent' : 'response';
      if (inPercent) inPercent.disabled = !percent;
      if (inResponse) {
        inResponse.disabled = percent;
        inResponse.textContent = words.margin.response(contextOf(state).columns.response ?? words.response.none);
      }
      setText(why, percent ? words.margin.unitGreyed : words.margin.percentGreyed);
      size.show(String(plan.comparisons.margin));
    },
  };
}

/** @param {HTMLElement} root @param {Acts} acts */
function mountLevel(root, acts) {
  const level = numberField(words.level.number, words.level.tooLarge, (value) => value >= 50 && value <= 99.99,
    (value) => acts.choose(`${words.level.label}: ${percentLevel(value / 100)}`, (choices) => ({
      ...choices, plan: withSection(choices.plan, 'comparisons', { level: value / 100 }),
    }), true), 'level');
  root.append(level.node, level.problem);
  return {
    /** @param {State} state */
    update: (state) => level.show(String(Number((state.choices.plan.comparisons.level * 100).toFixed(4)))),
  };
}

/** @param {HTMLElement} root @param {Acts} acts */
function mountDimension(root, acts) {
  const knots = numberField(words.dimension.number, words.dimension.number,
    (value) => Number.isInteger(value) && value >= 3,
    (value) => acts.choose(`${words.dimension.label}: ${words.dimension.written(value)}`, (choices) => ({
      ...choices, plan: withSection(choices.plan, 'curves', { dimension: value }),
    }), true), 'dimension');
  root.append(knots.node, knots.problem);
  return {
    /** @param {State} state */
    update(state) {
      const { dimension } = state.choices.plan.curves;
      knots.show(typeof dimension === 'number' ? String(dimension) : '');
    },
  };
}

/**
 * The column of totals of a binomial response.
 * @param {HTMLElement} root
 * @param {Acts} acts
 */
function mountTotal(root, acts) {
  const { distribution } = words;
  const column = el('select', { 'data-field': 'total' });
  const node = el('label', { class: 'field' }, el('span', {}, distribution.total), column);
  column.addEventListener('change', () => acts.choose(`${distribution.total}: ${column.value || distribution.noTotal}`, (choices) => ({
    ...choices, plan: withSection(choices.plan, 'columns', { total: column.value || null }),
  })));
  root.append(node);
  return {
    /** @param {State} state */
    update(state) {
      const { plan } = state.choices;
      node.hidden = plan.response.distribution !== 'binomial';
      const taken = Object.values(contextOf(state).columns);
      const free = contextOf(state).candidates.filter(({ name }) => !taken.includes(name));
      column.replaceChildren(el('option', { value: '' }, distribution.noTotal), ...free.map(({ name }) => el('option', { value: name }, name)));
      column.value = plan.columns.total ?? '';
    },
  };
}

/**
 * A level whose day is sought, and the stretch over which growth is taken.
 * @param {HTMLElement} root
 * @param {Acts} acts
 */
function mountAlso(root, acts) {
  const { also } = words;
  const problem = el('p', { class: 'complaint', role: 'alert' });
  /** @param {Partial<import('../types.js').Plan['comparisons']>} values @param {string} label */
  const set = (values, label) => acts.choose(label, (choices) => ({
    ...choices, plan: withSection(choices.plan, 'comparisons', values),
  }), true);
  let positive = false;
  const target = field(also.target, { inputmode: 'decimal', 'data-field': 'target' }, (typed) => {
    const value = typed.trim() === '' ? null : parseNumber(typed);
    const good = typed.trim() === '' || (value !== null && (!positive || value > 0));
    setText(problem, good ? '' : also.targetWrong);
    if (good) set({ target: value }, value === null ? also.none : also.targetWritten(String(value)));
  });
  const stretch = () => {
    const [from, to] = [parseNumber(start.input.value), parseNumber(end.input.value)];
    const empty = start.input.value.trim() === '' && end.input.value.trim() === '';
    const good = empty || (from !== null && to !== null && from < to);
    setText(problem, good ? '' : also.growthWrong);
    if (empty) set({ growth_over: null }, also.none);
    else if (good && from !== null && to !== null) set({ growth_over: [from, to] }, also.growthWritten(String(from), String(to)));
  };
  const start = field(also.growthFrom, { inputmode: 'decimal', 'data-field': 'growth-from' }, stretch);
  const end = field(also.growthTo, { inputmode: 'decimal', 'data-field': 'growth-to' }, stretch);
  root.append(target.node, start.node, end.node, problem);
  return {
    /** @param {State} state */
    update(state) {
      const { comparisons, response } = state.choices.plan;
      positive = response.transform === 'log' || response.distribution !== 'normal';
      target.show(comparisons.target === null ? '' : String(comparisons.target));
      const over = comparisons.growth_over;
      if (document.activeElement !== start.input && document.activeElement !== end.input) {
        start.show(over === null ? '' : String(over[0]));
        end.show(over === null ? '' : String(over[1]));
      }
    },
  };
}

/**
 * The length of a round, and the range of a process.
 * @param {HTMLElement} root
 * @param {Acts} acts
 */
function mountBasis(root, acts) {
  const { period: periodLabel, range: rangeLabel, positive, label } = words.basis;
  /** @param {'period'|'range'} key @param {string} name */
  const make = (key, name) => numberField(name, positive, (value) => value > 0,
    (value) => acts.choose(`${label}: ${value}`, (choices) => ({
      ...choices, plan: withSection(choices.plan, 'curves', { [key]: value }),
    }), true), key);
  const period = make('period', periodLabel);
  const range = make('range', rangeLabel);
  root.append(period.node, period.problem, range.node, range.problem);
  return {
    /** @param {State} state */
    update(state) {
      const { curves } = state.choices.plan;
      period.node.hidden = curves.basis !== 'cyclic';
      range.node.hidden = curves.basis !== 'gaussian-process';
      period.show(curves.period === null ? '' : String(curves.period));
      range.show(curves.range === null ? '' : String(curves.range));
    },
  };
}

/**
 * The noun for one subject and for several.
 * @param {HTMLElement} root
 * @param {Acts} acts
 */
export function mountNoun(root, acts) {
  const fallback = words.noun.default;
  /** @param {'one'|'many'} which */
  const make = (which) => field(words.noun[which], { maxlength: '24', 'data-field': `noun-${which}` }, (typed) => {
    const value = typed.trim();
    acts.choose(text.data.labels.noun(value || fallback[which]), (choices) => {
      const noun = { ...choices.noun, [which]: value || fallback[which] };
      const followed = which === 'one' && choices.noun.many === `${choices.noun.one}s`;
      return { ...choices, noun: followed ? { ...noun, many: `${noun.one}s` } : noun };
    }, true);
  });
  const one = make('one');
  const many = make('many');
  root.append(one.node, many.node, el('p', { class: 'hint' }, words.noun.fits));
  return {
    /** @param {State} state */
    update(state) {
      one.show(state.choices.noun.one);
      many.show(state.choices.noun.many);
    },
  };
}

/** @param {'response'|'time'|'group'} role @param {HTMLElement} root @param {Acts} acts */
function mountCalled(role, root, acts) {
  /** @type {string|null} */
  let column = null;
  const called = field(text.data.table.calledShort, { maxlength: '24' }, (typed) => {
    const name = column;
    if (name === null) return;
    acts.choose(text.data.labels.called(name, typed), (choices) => ({
      ...choices, called: { ...choices.called, [name]: typed.trim() },
    }), true);
  });
  root.append(called.node);
  return {
    /** @param {State} state */
    update(state) {
      column = contextOf(state).columns[role];
      called.node.hidden = column === null;
      called.show(column === null ? '' : state.choices.called[column] ?? '');
    },
  };
}
