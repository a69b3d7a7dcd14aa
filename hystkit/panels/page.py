"""What a panel tells the page: its look, and names for those who do not see it."""

from __future__ import annotations

import html

#: Every rule is confined to the panel; colours follow the host, light or dark.
CSS = """
.hystkit-panel {
  --hk-line: var(--jp-border-color2, #b4bac1); --hk-text: var(--jp-ui-font-color1, #1b2430);
  --hk-quiet: var(--jp-ui-font-color2, #6b7480); --hk-accent: var(--jp-brand-color1, #0068b0);
  --hk-sheet: var(--jp-layout-color1, transparent);
  --hk-tint: color-mix(in srgb, var(--hk-accent) 14%, transparent);
  --hk-bad: var(--jp-error-color1, #b3261e);
  --hk-care: color-mix(in srgb, #d97706 82%, var(--hk-text));
  --hk-good: color-mix(in srgb, #0f8a5f 82%, var(--hk-text));
  --hk-size: var(--jp-widgets-font-size, 13px);
  color: var(--hk-text); font-size: var(--hk-size); overflow: visible;
}
.hystkit-panel .jupyter-widgets { margin: 0; }
.hystkit-panel .widget-html-content, .hystkit-panel .widget-htmlmath-content { line-height: 1.45; }
.hystkit-panel .hystkit-page { display: none; }
.hystkit-panel .hystkit-card, .hystkit-panel .hystkit-controls {
  border: 1px solid var(--hk-line); border-radius: 6px; padding: 10px 12px;
  background: var(--hk-sheet); overflow: hidden;
}
.hystkit-panel .hystkit-section { padding: 8px 0; overflow: visible; }
.hystkit-panel .hystkit-section:first-child { padding-top: 0; }
.hystkit-panel .hystkit-section:last-child { padding-bottom: 0; }
.hystkit-panel .hystkit-section + .hystkit-section { border-top: 1px solid var(--hk-line); }
.hystkit-panel .hystkit-heading .widget-html-content { font-weight: 600; }
.hystkit-panel .hystkit-quiet { color: var(--hk-quiet); font-weight: normal; font-size: 0.92em; }
.hystkit-panel .hystkit-sub { font-size: 0.78em; line-height: 0; vertical-align: -0.25em; }
.hystkit-panel .hystkit-row { margin: 2px 0; overflow: visible; }
.hystkit-panel .hystkit-row > .widget-gridbox { overflow: visible; }
.hystkit-panel .hystkit-label { overflow: hidden; }
.hystkit-panel .hystkit-note { color: var(--hk-bad); font-size: 0.92em; }
.hystkit-panel .hystkit-note .widget-html-content:empty { display: none; }
.hystkit-panel .hystkit-slider { overflow: visible; }
.hystkit-panel .hystkit-slider .widget-label { text-align: left; color: var(--hk-text); }
.hystkit-panel .hystkit-slider .slider-container { margin: 0 8px; min-width: 0; }
/* The host draws its arrow in black, on a dark page as well. */
.hystkit-panel .widget-dropdown > select {
  background-image: linear-gradient(45deg, transparent 50%, var(--hk-text) 50%),
    linear-gradient(135deg, var(--hk-text) 50%, transparent 50%);
  background-position: right 11px center, right 6px center; background-size: 5px 5px;
  background-repeat: no-repeat;
}
.hystkit-panel .hystkit-field input, .hystkit-panel .hystkit-field select {
  height: 26px; border-radius: 4px; padding: 2px 6px; min-width: 0;
  font-variant-numeric: tabular-nums;
}
.hystkit-panel .hystkit-choice .widget-label { text-align: left; color: var(--hk-quiet); }
.hystkit-panel .hystkit-choice {
  height: auto; padding: 2px 0; overflow: visible;
  display: flex; flex-flow: row nowrap; align-items: center;
}
.hystkit-panel .hystkit-choice > .widget-label { flex: none; }
.hystkit-panel .hystkit-choice > div { display: flex; flex-wrap: wrap; gap: 4px; }
.hystkit-panel .hystkit-choice button, .hystkit-panel .hystkit-chip,
.hystkit-panel .hystkit-copy button {
  height: 26px; line-height: 24px; padding: 0 9px; margin: 0; width: auto; box-shadow: none;
  border: 1px solid var(--hk-line); border-radius: 13px; background: transparent;
  color: var(--hk-text); font-size: 0.96em; cursor: pointer;
}
.hystkit-panel .hystkit-choice button.mod-active, .hystkit-panel .hystkit-chip.mod-active {
  border-color: var(--hk-accent); background: var(--hk-tint); font-weight: 600; box-shadow: none;
}
.hystkit-panel button:focus-visible, .hystkit-panel input:focus-visible,
.hystkit-panel select:focus-visible, .hystkit-panel .noUi-handle:focus-visible {
  outline: 2px solid var(--hk-accent); outline-offset: 1px;
}
.hystkit-panel .hystkit-chips { gap: 6px; padding-top: 4px; }
.hystkit-panel .hystkit-chips:empty { display: none; }
.hystkit-panel .hystkit-chip.mod-active::before { content: "✓ "; }
.hystkit-panel .hystkit-fold {
  text-align: left; background: transparent; border: 0; box-shadow: none; padding: 2px 0;
  line-height: 1.45; color: var(--hk-text); font-weight: 600; flex: none;
}
.hystkit-panel .hystkit-fold:hover { color: var(--hk-accent); box-shadow: none; }
.hystkit-panel .hystkit-fold.mod-active { background: transparent; box-shadow: none; }
.hystkit-panel .hystkit-folded { padding-top: 4px; }
.hystkit-panel .hystkit-head { gap: 6px; padding-bottom: 4px; }
.hystkit-panel .hystkit-head > .hystkit-heading { margin-right: auto; }
.hystkit-panel .hystkit-copy button { color: var(--hk-accent); }
.hystkit-panel .hystkit-said { color: var(--hk-good); padding-left: 6px; }
.hystkit-panel .hystkit-said:empty { padding: 0; }
.hystkit-panel .hystkit-words { position: absolute; width: 1px; height: 1px; overflow: hidden;
  clip-path: inset(50%); }
.hystkit-panel .hystkit-view { position: relative; overflow: auto hidden; margin: auto 0; }
.hystkit-panel .hystkit-findings .widget-html-content {
  display: flex; flex-wrap: wrap; gap: 2px 20px; padding: 0 4px;
}
.hystkit-panel .hystkit-kind { position: absolute; width: 1px; height: 1px; overflow: hidden;
  clip-path: inset(50%); }
.hystkit-panel .hystkit-warning-line { color: var(--hk-care); font-weight: 600; }
.hystkit-panel .hystkit-fault-line { color: var(--hk-bad); font-weight: 600; }
.hystkit-panel .hystkit-pass-line b { color: var(--hk-good); }
.hystkit-panel .hystkit-math { overflow-x: auto; overflow-y: hidden; padding: 4px 0; }
.hystkit-panel .hystkit-math mjx-container[display="true"] {
  text-align: left; margin: 0.3em 0; min-width: 0;
}
.hystkit-panel .hystkit-math .widget-htmlmath-content { font-size: 94%; }
.hystkit-panel .hystkit-numbers .widget-htmlmath-content { font-size: 84%; }
.hystkit-panel .hystkit-table table {
  border-collapse: collapse; width: auto; min-width: min(100%, 300px); margin: 0;
}
.hystkit-panel .hystkit-table th, .hystkit-panel .hystkit-table td {
  padding: 3px 0 3px 24px; text-align: right; font-variant-numeric: tabular-nums;
  border-bottom: 1px solid var(--hk-line); white-space: nowrap;
}
.hystkit-panel .hystkit-table th { font-weight: normal; color: var(--hk-quiet); }
.hystkit-panel .hystkit-table th:first-child { padding-left: 0; text-align: left; }
.hystkit-panel .hystkit-table tr:last-child > * { border-bottom: 0; }
.hystkit-panel .hystkit-table .widget-html-content { overflow-x: auto; }
.hystkit-panel .hystkit-wrapped table { width: 100%; }
.hystkit-panel .hystkit-wrapped th, .hystkit-panel .hystkit-wrapped td {
  white-space: normal; text-align: left; padding-left: 14px; vertical-align: top;
  font-weight: normal;
}
.hystkit-panel .hystkit-wrapped th:first-child, .hystkit-panel .hystkit-wrapped td:nth-child(3) {
  white-space: nowrap; padding-left: 0;
}
.hystkit-panel .hystkit-wrapped td:nth-child(3) { text-align: right; padding-left: 14px; }
.hystkit-panel .hystkit-wrapped .hystkit-fault-line th { color: var(--hk-bad); font-weight: 600; }
.hystkit-panel .hystkit-wrapped .hystkit-warning-line th {
  color: var(--hk-care); font-weight: 600;
}
.hystkit-panel .hystkit-wrapped tr > td { color: var(--hk-text); }
.hystkit-panel .hystkit-wrapped { container-type: inline-size; }
@container (max-width: 460px) {
  .hystkit-panel .hystkit-wrapped :is(table, tbody, tr, th, td) { display: block; }
  .hystkit-panel .hystkit-wrapped thead { display: none; }
  .hystkit-panel .hystkit-wrapped tr { border-bottom: 1px solid var(--hk-line); padding: 3px 0; }
  .hystkit-panel .hystkit-wrapped tr > :is(th, td, td:nth-child(3)) {
    border: 0; padding: 0; text-align: left; white-space: normal;
  }
  .hystkit-panel .hystkit-wrapped td:empty { display: none; }
  .hystkit-panel .hystkit-wrapped td:nth-child(3)::before { content: "margin: "; }
  .hystkit-panel .hystkit-bounds td:nth-child(3)::before { content: none; }
  .hystkit-panel .hystkit-wrapped td:nth-child(4)::before { content: "to change: "; }
}
.hystkit-panel .hystkit-candidate { padding: 3px 0; overflow: visible; }
.hystkit-panel .hystkit-candidate + .hystkit-candidate { border-top: 1px solid var(--hk-line); }
.hystkit-panel .hystkit-error:has(.widget-html-content:empty) { display: none; }
.hystkit-panel .hystkit-error .widget-html-content:not(:empty) {
  border: 1px solid var(--hk-bad); border-radius: 6px; padding: 8px 12px; color: var(--hk-bad);
}
.hystkit-panel .hystkit-error pre { font-size: 0.9em; overflow-x: auto; color: var(--hk-text); }
"""

# Sliders and pictures have no trait for an accessible name, and a kernel does not know how much
# room there is. So the page names handles and fields after their labels, keeps their arrow keys
# from moving through the cells of a notebook, gives each picture its words as alternative text,
# and reports the width of the results.
_SCRIPT = """
var mark=this,tries=50;
function start(){
 var panel=mark.closest('.hystkit-panel');
 if(!panel||!panel.isConnected){if(tries-->0)setTimeout(start,100);return}
 var seen=null,sent=0;
 function fit(box){
  var field=panel.querySelector('.hystkit-room input'),room=Math.round(box.clientWidth/20)*20;
  if(!field||room<200||room===sent)return;
  sent=room;field.value=String(room);
  field.dispatchEvent(new Event('change',{bubbles:true}))
 }
 function sync(){
  panel.querySelectorAll('.noUi-handle').forEach(function(handle){
   var slider=handle.closest('.hystkit-slider'),label=slider&&slider.querySelector('.widget-label');
   if(label&&label.title)handle.setAttribute('aria-label',label.title)});
  panel.querySelectorAll('input[title],select[title]').forEach(function(field){
   field.setAttribute('aria-label',field.title)});
  panel.querySelectorAll('select,.noUi-handle').forEach(function(field){
   field.setAttribute('data-lm-suppress-shortcuts','true')});
  panel.querySelectorAll('.hystkit-fold').forEach(function(fold){
   fold.setAttribute('aria-expanded',fold.classList.contains('mod-active'))});
  panel.querySelectorAll('img.hystkit-picture').forEach(function(picture){
   var words=picture.parentNode.querySelector('.hystkit-words');
   if(words)picture.alt=words.textContent});
  var box=panel.querySelector('.hystkit-results');
  if(box&&box!==seen&&panel.querySelector('.hystkit-room input')){
   seen=box;new ResizeObserver(function(){fit(box)}).observe(box)}
 }
 new MutationObserver(sync).observe(panel,{childList:true,subtree:true});sync()
}
start()
""".replace("\n", "")

_DOT = "data:image/gif;base64,R0lGODlhAQABAAAAACH5BAEKAAEALAAAAAABAAEAAAICTAEAOw=="


def page_setup() -> str:
    """Write the HTML that brings the look and the names.

    Returns
    -------
    str
        A style sheet, and a picture of one pixel whose loading starts the script.
    """
    script = html.escape(_SCRIPT, quote=True)
    return f'<style>{CSS}</style><img src="{_DOT}" alt="" onload="{script}">'
