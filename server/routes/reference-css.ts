/** Styles of the page that describes the API. */
export const REFERENCE_CSS = `
:root { color-scheme: light dark; --paper: #faf7f1; --ink: #26221d; --soft: #6b6257; --line: #ddd4c6; --copper: #9a5424; }
@media (prefers-color-scheme: dark) { :root { --paper: #1d1a16; --ink: #ece5da; --soft: #a89d8f; --line: #3d372f; --copper: #e09a62; } }
* { box-sizing: border-box; }
body { margin: 0 auto; max-width: 62rem; padding: 1.5rem 1rem 4rem; background: var(--paper); color: var(--ink); font: 1rem/1.5 system-ui, sans-serif; }
h1, h2, h3 { line-height: 1.2; }
h2 { margin-top: 2.5rem; border-bottom: 1px solid var(--line); }
a { color: var(--copper); }
nav ul { columns: 2 18rem; padding-left: 1rem; }
details { border: 1px solid var(--line); border-radius: 4px; margin: 0.5rem 0; padding: 0 0.75rem; }
summary { cursor: pointer; padding: 0.5rem 0; }
summary b { display: inline-block; min-width: 4.2rem; color: var(--copper); font-family: ui-monospace, monospace; }
code, pre { font-family: ui-monospace, monospace; font-size: 0.9em; overflow-wrap: anywhere; }
pre { overflow-x: auto; border-left: 3px solid var(--line); padding: 0.25rem 0 0.25rem 0.75rem; white-space: pre-wrap; }
table { border-collapse: collapse; width: 100%; }
th, td { border-bottom: 1px solid var(--line); padding: 0.25rem 0.5rem 0.25rem 0; text-align: left; vertical-align: top; }
.soft { color: var(--soft); }
`
