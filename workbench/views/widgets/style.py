"""The style sheet of the workbench: theme variables only, so that light and dark both read."""

STYLE = """<style>
.wb-page { --bq-content-font-color: var(--jp-content-font-color1); color: var(--jp-content-font-color1);
  container-type: inline-size; padding: 2px 4px 6px; }
.wb-page > .widget-html, .wb-pane > .widget-html { margin: 0; width: auto; }
.wb-page .widget-html-content, .wb-page .jupyter-widgets.widget-html .widget-html-content { line-height: 1.35; }
.wb-head { display: flex; flex-wrap: wrap; gap: 2px 18px; align-items: baseline; font-size: 13px; }
.wb-title { font-size: 17px; font-weight: 600; }
.wb-head details { max-width: 100%; }
.wb-head details[open] { flex-basis: 100%; }
.wb-head summary { cursor: pointer; color: var(--jp-content-link-color, #0072b2); }
.wb-head ul { margin: 2px 0 6px; padding-left: 20px; max-height: 180px; overflow-y: auto; }
.wb-key { display: flex; flex-wrap: wrap; gap: 2px 20px; font-size: 12px; margin: 4px 0 2px; }
.wb-least { display: flex; flex-wrap: wrap; gap: 1px 16px; font-size: 13.5px; margin: 5px 0 2px; padding: 3px 8px;
  border-left: 4px solid #0072b2; background: var(--jp-layout-color2); }
.wb-least > span:first-child { opacity: 0.85; }
.wb-entry { display: inline-flex; align-items: center; gap: 6px; }
.wb-entry > i { display: inline-block; width: 14px; height: 11px; }
.wb-controls { display: flex; flex-flow: row wrap; gap: 0 14px; overflow: visible; }
.wb-controls .wb-who { flex: 1 1 190px; min-width: 180px; overflow: visible; }
.wb-controls .wb-who > .widget-label { height: 20px; line-height: 20px; font-size: 11px; opacity: 0.8; }
.wb-controls .wb-who select { height: 76px; }
.wb-controls .wb-rest { flex: 4 1 520px; display: grid; grid-template-columns: repeat(auto-fit, minmax(212px, 1fr));
  gap: 2px 14px; align-content: start; overflow: visible; }
.wb-controls .wb-rest > * { width: auto; min-width: 0; }
.wb-controls .wb-rest .widget-label { width: 86px; flex: 0 0 86px; text-align: left; font-size: 12px; }
.wb-controls .widget-readout { min-width: 58px; font-size: 12px; text-align: right; }
.wb-panes { display: flex; flex-flow: row wrap; gap: 0 8px; overflow: visible; }
.wb-panes > .wb-pane { flex: 1 1 0%; min-width: 240px; overflow: hidden; margin: 0; }
.wb-pane-head { height: 42px; overflow: hidden; font-size: 12px; padding: 0 2px; }
.wb-pane-title { font-size: 13px; white-space: nowrap; overflow: hidden; text-overflow: ellipsis; }
.wb-under { height: 22px; white-space: nowrap; }
.wb-under span { opacity: 0.85; }
.wb-ramp { display: inline-flex; align-items: center; gap: 6px; }
.wb-ramp > i { display: inline-block; width: 60px; height: 9px; }
.wb-strip { display: flex; gap: 8px; align-items: flex-start; padding-right: 16px; }
.wb-strip-bar { position: relative; flex: 1; margin: 1px 6px 0; }
.wb-strip-bar > i { display: block; height: 8px; }
.wb-strip-ticks { position: relative; height: 13px; }
.wb-strip-ticks > span { position: absolute; transform: translateX(-50%);
  font-size: 10.5px; line-height: 12px; opacity: 1; }
.wb-caption { font-size: 11.5px; line-height: 15px; min-height: 30px; padding: 0 4px; overflow: hidden;
  display: -webkit-box; -webkit-line-clamp: 2; -webkit-box-orient: vertical; }
.wb-page .bqplot svg text { font-size: 11px; font-family: var(--jp-ui-font-family) !important; }
.wb-page .bqplot svg text.axislabel { font-size: 12px; fill: var(--jp-content-font-color1); }
.wb-page .bqplot .axis path.domain, .wb-page .bqplot .axis line { stroke: var(--jp-content-font-color2); }
body[data-jp-theme-light="false"] .wb-lines .bqplot svg :is(.line, .element),
body[data-jp-theme-light="false"] :is(.wb-swatch, .wb-ramp > i) { filter: brightness(1.35); }
.wb-page .bqplot .element, .wb-page .bqplot path.line { cursor: pointer; }
.wb-page .bqplot .label text, .wb-page .bqplot text.label { paint-order: stroke; stroke: #ffffff; stroke-width: 2.5px; }
.wb-standing { display: flex; flex-flow: row wrap; gap: 4px 10px; align-items: center; margin-top: 6px;
  overflow: visible; }
.wb-standing > .widget-dropdown { flex: 2 1 300px; }
.wb-standing > .widget-text { flex: 2 1 220px; }
.wb-standing .widget-label { width: auto; }
.wb-line { display: flex; flex-flow: row wrap; align-items: center; gap: 0 12px; overflow: visible; }
.wb-line > .wb-stepper { flex: 0 1 230px; }
.wb-line > .wb-stepper > .widget-label { width: auto; }
.wb-line > .widget-html { flex: 1 1 300px; margin: 0; }
.wb-status { font-size: 12.5px; min-height: 18px; padding: 1px 2px;}
.wb-trouble { border-left: 4px solid #d55e00; padding-left: 8px; }
.wb-log pre { max-height: 200px; overflow: auto; font-size: 11px; }
.wb-scroll { overflow-x: auto; margin-top: 4px; }
.wb-table { border-collapse: collapse; font-size: 12px; font-variant-numeric: tabular-nums; margin: 0; }
.wb-table caption { text-align: left; font-weight: 600; padding: 2px 0 4px; caption-side: top; }
.wb-table th, .wb-table td { padding: 1px 6px; border-bottom: 1px solid var(--jp-border-color2); vertical-align: top; }
.wb-table thead th { text-align: left; border-bottom: 1px solid var(--jp-border-color0); }
.wb-table thead th > span, .wb-table tbody th > span { font-weight: 400; opacity: 0.8; }
.wb-table tbody th { text-align: left; font-weight: 400; white-space: nowrap; }
.wb-table .wb-value { text-align: right; padding-right: 3px; white-space: nowrap; }
.wb-table .wb-spread { text-align: left; padding-left: 0; white-space: nowrap; opacity: 0.85; }
.wb-table .wb-words td { max-width: 230px; overflow-wrap: anywhere; }
.wb-table code { font-size: 11px; }
@container (max-width: 760px) { .wb-panes > .wb-pane { flex-basis: 100%; } }
</style>"""
