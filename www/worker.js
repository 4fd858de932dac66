/**
 * The worker: holds the table and computes, so that the page never stutters.
 *
 * A plain script. The page starts it as one text together with the glue of the
 * computing module, so that it is bound by the page's own policy. Messages in:
 * `{id, op, args}`. Messages out: `{id, ok}` or `{id, error: {message, dead}}`.
 * After an error with `dead` the worker computes nothing more: replace it.
 */

/* global wasm_bindgen */

(() => {
  /** @type {any} */
  let session = null;

  /** @type {Record<string, (args: any) => unknown>} */
  const operations = {
    start: ({ module }) => {
      wasm_bindgen.initSync({ module });
      session = new wasm_bindgen.Session();
      return null;
    },
    open: ({ bytes }) => session.open(bytes),
    preview: ({ plan }) => session.preview(plan),
    describe: ({ plan }) => session.describe(plan),
    run: ({ plan }) => {
      const findings = session.run(plan);
      return { findings, traces: session.traces() };
    },
    checks: ({ plan }) => session.checks(plan),
    dropout: ({ plan }) => session.dropout(plan),
    sensitivity: ({ plan, asked }) => session.sensitivity(plan, asked),
    candidates: ({ plan }) => session.candidates(plan),
    usual: ({ plan }) => session.usual(plan),
    report: ({ plan, refits, context }) => session.report(plan, refits, context),
    markerColumns: ({ plan }) => session.marker_columns(plan),
    marker: ({ plan, name }) => session.marker(plan, name),
    markersAnswer: ({ markers, rate, level }) => wasm_bindgen.markers_answer(markers, rate, level),
    sizeFrom: ({ plan, pair }) => session.size_from(plan, pair),
    sizeRun: ({ request, design, first, count }) => wasm_bindgen.size_run(request, design, first, count),
    sizeAnswer: ({ request, counts }) => wasm_bindgen.size_answer(request, counts),
    refits: ({ plan, first, count }) => session.refits(plan, first, count),
    calibrated: ({ plan, refits }) => ({ findings: session.run_calibrated(plan, refits), traces: session.traces() }),
  };

  /** @param {unknown} cause */
  const asError = (cause) => {
    const dead = cause instanceof WebAssembly.RuntimeError || cause instanceof RangeError;
    const message = cause instanceof Error ? cause.message : String(cause);
    return { message, dead };
  };

  self.onmessage = ({ data: { id, op, args } }) => {
    try {
      const operation = operations[op];
      if (!operation) throw new Error(`no operation ${op}`);
      self.postMessage({ id, ok: operation(args) });
    } catch (cause) {
      self.postMessage({ id, error: asError(cause) });
    }
  };
})();
