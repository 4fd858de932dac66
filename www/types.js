/**
 * Shapes that travel through the page. Types only: nothing here runs.
 *
 * `Plan` and `Findings` are the JSON of the study crate's types of the same
 * names; arrays over time in one object have one length, and a value that does
 * not exist is `null`.
 */

/** @typedef {'empty'|'reading'|'fitting'|'ready'|'question'|'problem'|'boundary'|'failed'} Status */
/** @typedef {'subject'|'time'|'group'|'response'|'cluster'} Role */
/** @typedef {null|false|string} ColumnChoice `null` infers, `false` means there is none. */

/**
 * @typedef {Object} Plan
 * @property {{subject: ColumnChoice, time: ColumnChoice, group: ColumnChoice, response: ColumnChoice, cluster: ColumnChoice, covariates: string[], bending: string[], block: string|null, crossed: string|null, removal: string|null, total: string|null}} columns
 * @property {{row: number, column?: string, reason: string}[]} exclusions
 * @property {string[]} removed Subjects removed as planned, by hand.
 * @property {{distribution: string, transform: 'identity'|'log', power: number|null, detection: string, start: 'as-measured'|'common'|'covariate'|'change'|'percent'}} response
 * @property {{shape: 'smooth'|'straight'|'by-time', basis: string, dimension: 'auto'|'full'|number, smoothness: 'per-group'|'shared', period: number|null, range: number|null, roughness: string}} curves
 * @property {'none'|'intercept'|'slope'|'curve'} subjects
 * @property {'auto'|'none'|'intercept'|'slope'} clusters
 * @property {'common'|'by-group'} subjects_spread
 * @property {{serial: 'none'|'ar1'|'unstructured', spread: 'common'|'by-group'|'with-mean'|'by-visit', nugget: boolean}} errors
 * @property {{pairs: 'all'|'against-control', control: string|null, level: number, margin: number, margin_unit: 'response'|'percent', band: 'simultaneous'|'pointwise', small_sample: 'none'|'df'|'calibrated'|'auto', refits: number, landmark: number|null, trend: boolean, target: number|null, growth_over: [number, number]|null, not_worse: 'higher'|'lower'|null, rates: boolean}} comparisons
 * @property {{start: number|null, end: number|null, count: number}} grid
 * @property {{day_zero: 'common'|'per-subject', date_order: string|null, layout: string|null, merges: {from: string, into: string}[], shared_ids: null|'different'|'same'|'mistake', sheet: string|null, cells: string|null, group_order: string[]}} reading
 * @property {{subject: string, subjects: string, time: string|null, response: string|null}} words
 * @property {number} seed
 */

/** @typedef {(number|null)[]} Series */
/** @typedef {{time: number[], mean: Series, se: Series, lower: Series, upper: Series, response_mean: Series, response_lower: Series, response_upper: Series}} CurvePoints */
/** @typedef {CurvePoints & {group: string, critical: number|Series, support: [number, number], at_visits: CurvePoints}} Curve */
/** @typedef {{time: number[], estimate: Series, se: Series, lower: Series, upper: Series, response_estimate: Series, response_lower: Series, response_upper: Series}} DifferencePoints */
/** @typedef {{start: number, end: number, direction?: 'above'|'below', open_start: boolean, open_end: boolean}} Stretch */
/** @typedef {DifferencePoints & {kind?: 'pair'|'factor'|'interaction'|'trend', from: string, to: string, p_adjusted?: number|null, critical: number|Series, support: [number, number]|null, margin: [number, number], stretches: Stretch[], beyond: Stretch[], inside: Stretch[], at_visits: DifferencePoints}} Difference */
/** @typedef {{row: number, column: string, value: string, message: string, kept?: boolean, stops?: boolean}} Problem `kept`: the value is fitted all the same. `stops`: nothing is computed before it is mended or left out. */
/** @typedef {{kind: string, pair: number|null, headline: string, text: string, depends: string}} Sentence */
/** @typedef {{name: string, subjects: number, rows: number, last_times: number[], at_visit: number[]}} GroupInfo */

/**
 * @typedef {Object} Findings
 * @property {string} version
 * @property {number} rows
 * @property {{effects: 'none'|'intercept'|'slope'}|null} [clusters]
 * @property {number} subjects
 * @property {{subject: string|null, time: string|null, group: string|null, response: string|null, cluster: string|null, reasons: {role: string, column: string|null, reason: string}[]}} columns
 * @property {Problem[]} problems
 * @property {{status: 'converged'|'boundary'|'failed', remarks: string[]}} fit
 * @property {Curve[]} curves
 * @property {Difference[]} differences
 * @property {{about: string, message: string}[]} notes
 * @property {Plan} plan
 * @property {GroupInfo[]} groups
 * @property {{distribution: string, transform: 'identity'|'log', reason: string}|null} [proposal] What the values suggest.
 * @property {[string, string][]} [cells] In a crossed design the labels of every group.
 * @property {number[]} visits
 * @property {{time_word: string, response: string, ratio: boolean, link?: string}} scale
 * @property {Sentence[]} sentences
 */

/**
 * One column of the table as read.
 * @typedef {Object} PreviewColumn
 * @property {string} name
 * @property {Role|null} role The role it was taken for.
 * @property {string} reason Why, or why not, in words.
 * @property {boolean} measured In a wide table: the values of one visit, or of one subject.
 */

/**
 * A role with a close rival: one question, answered by a partial plan.
 * @typedef {Object} Question
 * @property {string} id
 * @property {string} text
 * @property {boolean} blocking Nothing can be computed before it is answered.
 * @property {{label: string, detail: string, columns: Partial<Plan['columns']>, reading: Partial<Plan['reading']>}[]} answers
 */

/**
 * What the reader understood of a table.
 * @typedef {Object} Preview
 * @property {PreviewColumn[]} columns
 * @property {{line: number, cells: string[]}[]} rows
 * @property {'long'|'wide-by-time'|'wide-by-subject'} layout
 * @property {number} totalRows
 * @property {string} format How the text was read, in words.
 * @property {Problem[]} problems
 * @property {Question[]} questions
 * @property {string[]} notes
 * @property {string|null} refusal Why the table cannot be used as asked; the rest then only shows it.
 * @property {{sheets: string[], sheet: string, cells: string}|null} workbook Where the table stands, if in a workbook.
 * @property {{from: string, into: string}[]} nearSpellings Group names that may be misspelt.
 */

/** @typedef {{group: string, time: number, n: number, mean: number|null, sd: number|null, median: number|null}} DescriptionRow */

/**
 * @typedef {Object} Description
 * @property {DescriptionRow[]} rows
 * @property {number[]} nonPositive Lines whose response is zero or negative.
 */

/** @typedef {{file: string, title: string, blurb: string, plan: Object, called?: Record<string, string>}} Demo */
/** @typedef {{kind: 'demo'|'own', name: string}} Source */
/** @typedef {{row: number, column: string|null, reason: string, seen: boolean, masked?: boolean}} LeftOut `column`: only this cell of a wide table. `masked`: judged with the groups' names masked. */

/**
 * The figure that is given out.
 * @typedef {Object} FigureChoices
 * @property {string} width Millimetres, as typed.
 * @property {string} font Points, as typed.
 * @property {{courses: boolean, gaps: boolean, followed: boolean}} panels
 * @property {boolean} bands
 * @property {boolean} points
 * @property {boolean} captions
 * @property {string[]} order Names of groups from the first on.
 * @property {Record<string, string>} names Names in the figure by those of the findings.
 * @property {string} valueTitle
 * @property {string} timeTitle
 */

/**
 * Everything that undo covers.
 * @typedef {Object} Choices
 * @property {Plan} plan
 * @property {Record<string, string>} called Short names of columns.
 * @property {{one: string, many: string}} noun
 * @property {LeftOut[]} leftOut
 * @property {{columns: string[]|null, rate: number}} markers Response columns to go through (`null`: all), and the false-discovery rate.
 * @property {FigureChoices} figure
 * @property {Record<string, string>|null} masks Names of the groups to what is shown instead; `null`: shown.
 * @property {Record<string, {text: string, base: string}>} edits Paragraphs of the report that the author rewrote.
 */

/** @typedef {{plan: string, status: 'working'|'done', value: any, message: string|null}} Answer */
/** @typedef {{label: string, choices: Choices}} Step */
/** @typedef {{name: string, lines: {group: string, time: number[], response_mean: number[]}[]}} LaidOver */

/** @typedef {{label: string, back: boolean, before: string|null, after: string|null, pair: {from: string, to: string}|null}} Change `back`: it took a choice back. */

/**
 * @typedef {Object} State
 * @property {string} room
 * @property {Status} status
 * @property {Source|null} source
 * @property {Preview|null} preview
 * @property {Description|null} description
 * @property {Choices} choices
 * @property {{past: Step[], future: Step[]}} history
 * @property {Findings|null} findings
 * @property {{findings: string, traces: string}|null} drawing What the drawing code needs, as it came from the worker.
 * @property {Change|null} change
 * @property {string|null} message What went wrong.
 * @property {string|null} notice What happened to the machinery, if anything.
 * @property {number|null} cursor
 * @property {boolean} seen Findings of this table have been on screen.
 * @property {boolean} slow The work under way takes long enough to be stopped.
 * @property {{done: number, total: number, secondsLeft: number|null}|null} calibrating
 * @property {number|null} took Milliseconds of the last fit.
 * @property {number[]} openPairs Pairs whose gap strip is open.
 * @property {LaidOver|null} over Lines of another model over the courses.
 * @property {Demo[]} demos
 * @property {{plan: string, refits: string}|null} refits What the calibration of a plan gave.
 * @property {string[]} lookedAt Other models that were looked at, for the report.
 * @property {Plan|null} fixed The plan as it was fixed.
 * @property {{on: boolean, found: {name: string, when: number, analysis: string}|null, message: string|null}} keeping Work kept on this device.
 * @property {{offered: string[]|null, progress: {done: number, total: number}|null, of: string|null, answer: any, message: string|null}} markers One plan over many columns: `of` is the plan of the answer.
 * @property {string} announcement
 * @property {{checks: Answer|null, usual: Answer|null, dropout: Answer|null, candidates: Answer|null, report: Answer|null}} answers What rooms asked for beyond the findings.
 */

/**
 * What a view may ask for. Made by the controller.
 * @typedef {Object} Acts
 * @property {(label: string, change: (choices: Choices) => Choices, typing?: boolean) => void} choose
 * @property {() => void} undo
 * @property {() => void} redo
 * @property {(time: number) => void} moveCursor
 * @property {(text: string) => void} openText
 * @property {(file: File) => void} openFile
 * @property {(demo: Demo) => void} openDemo
 * @property {(room: string) => void} go
 * @property {() => void} bringTable Goes to the paste box.
 * @property {() => void} stop
 * @property {(held: import('./copy-check.js').Reference, tell: (done: number, total: number) => void) => Promise<import('./copy-check.js').CopyReport>} checkCopy
 * @property {(what: 'candidates') => void} ask Asks for what is computed only when wanted.
 * @property {() => string} planText The plan as it is sent.
 * @property {(asked: Record<string, any>) => Promise<any>} sensitivity Pooled gaps under an assumption on those who left.
 * @property {() => State} look The state as it is.
 * @property {(whole: boolean) => Promise<void>} saveAnalysis With the table, or its fingerprint only.
 * @property {() => void} lookForMarkers Asks which columns could be the response.
 * @property {(columns: string[], rate: number) => void} runMarkers
 * @property {() => void} stopMarkers
 * @property {() => void} keepWork
 * @property {() => void} eraseWork
 * @property {() => void} openKept
 * @property {() => void} fixPlan
 * @property {() => import('./sizing.js').Sizing} sizing The workers that simulate studies.
 * @property {(pair: number) => Promise<any>} sizeFrom A sample-size request from the fitted table; `null` where there is none.
 * @property {() => void} retry
 * @property {(over: LaidOver|null) => void} layOver
 * @property {(pair: number) => void} togglePair
 * @property {(row: number, column: string|null, reason: string) => void} leaveOut
 * @property {(row: number, column: string|null) => void} takeBack
 */

/**
 * A part of the page: mounted once, then told of every state.
 * @typedef {{update: (state: State) => void}} View
 */

/**
 * A room of the page.
 * @typedef {{id: string, title: string, mount: (root: HTMLElement, acts: Acts) => View}} Room
 */

/** @typedef {{left: number, right: number, top: number, bottom: number}} Rect */

/**
 * Where the drawing put things, in CSS pixels.
 * @typedef {Object} Layout
 * @property {number} width
 * @property {number} height
 * @property {{left: number, right: number, start: number, end: number}} x
 * @property {(Rect & {kind: string, pair: number|null, plot?: {top: number, bottom: number}|null, y?: {kind: string, low: number, high: number}|null})[]} strips
 */

export {};
