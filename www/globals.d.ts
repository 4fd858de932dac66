/** The glue of the computing module: a plain script, so a name of its own. */
declare const wasm_bindgen: any;
