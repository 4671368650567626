#include "report/html_style.hpp"

namespace stanchion {

const char* const kHtmlStyle = R"css(
:root {
  color-scheme: light dark;
  --paper: #f4f1ea; --sheet: #fffdf9; --ink: #1c2530; --soft: #56616d; --line: #d8d2c4; --tint: #efeadf;
  --blue: #17608f; --blue-soft: #a9cbe0; --orange: #c4560a; --ring: #7d1d4f; --clear: #17608f; --heed: #b2470a;
  --open: #6b5a2a; --f0: #a9bdcb; --f1: #7da9c6; --f2: #4a8ab6; --f3: #1f5f8f; --f4: #b85a14; --f5: #7d1d4f;
}
@media (prefers-color-scheme: dark) {
  :root {
    --paper: #0f1317; --sheet: #171c22; --ink: #ebe7dd; --soft: #a0abb6; --line: #343d47; --tint: #212830;
    --blue: #79bce8; --blue-soft: #34566d; --orange: #f29a4e; --ring: #f2a0c4; --clear: #79bce8; --heed: #f29a4e;
    --open: #d9c37a; --f0: #5a6975; --f1: #5784a0; --f2: #62a0c8; --f3: #9dd0f0; --f4: #f29a4e; --f5: #f2a0c4;
  }
}
* { box-sizing: border-box; }
html { background: var(--paper); }
body {
  margin: 0; color: var(--ink); font: 16px/1.5 system-ui, "Segoe UI", Roboto, "Helvetica Neue", "DejaVu Sans", sans-serif;
  font-variant-numeric: tabular-nums; overflow-wrap: anywhere;
}
main { max-width: 74rem; margin: 0 auto; padding: 2.2rem 2.4rem 3rem; background: var(--sheet); min-height: 100vh; }
h1, .lead { font-family: "Iowan Old Style", Palatino, "Palatino Linotype", "Book Antiqua", "DejaVu Serif", Georgia, serif; }
header.top { display: flex; flex-wrap: wrap; justify-content: space-between; gap: .3rem 2rem; align-items: baseline;
  border-bottom: 3px double var(--line); padding-bottom: .7rem; }
header.top h1 { font-size: 1.45rem; line-height: 1.25; margin: 0; font-weight: 600; }
header.top p { margin: 0; color: var(--soft); }
.verdict { display: grid; grid-template-columns: 4.4rem 1fr; gap: 0 1.4rem; padding: 1.8rem 0 1.5rem; }
.verdict svg { width: 4.4rem; height: 4.4rem; }
.verdict .lead { font-size: 1.62rem; line-height: 1.28; margin: 0 0 .5rem; font-weight: 600; text-wrap: balance; }
.verdict p { margin: 0 0 .35rem; max-width: 62rem; }
.verdict .stand { color: var(--soft); }
.clear { color: var(--clear); } .heed { color: var(--heed); } .open { color: var(--open); }
section.band { display: grid; grid-template-columns: 11rem minmax(0, 1fr); gap: 0 1.8rem; padding: 1.3rem 0;
  border-top: 1px solid var(--line); }
section.band > h2 { font-size: .98rem; line-height: 1.35; margin: .1rem 0 0; font-weight: 650; color: var(--soft); }
dl { display: grid; grid-template-columns: max-content minmax(0, 1fr); gap: .22rem 1.3rem; margin: 0; align-content: start; }
dt { color: var(--soft); } dd { margin: 0; }
ul { margin: 0; padding-left: 1.1rem; } li { margin: 0 0 .3rem; }
table { border-collapse: collapse; width: 100%; margin: .2rem 0; }
td { overflow-wrap: break-word; } td.digest { overflow-wrap: anywhere; } th, td:first-child { overflow-wrap: normal; white-space: nowrap; }
.scroll { overflow-x: auto; } .scroll + dl { margin-top: .6rem; } .narrow { display: none; }
th { text-align: left; font-weight: 600; color: var(--soft); border-bottom: 1px solid var(--line); }
td, th { padding: .22rem .9rem .22rem 0; vertical-align: top; } .right { text-align: right; white-space: nowrap; overflow-wrap: normal; }
table.close { font-size: .84rem; } table.close td, table.close th { padding-right: .55rem; }
table.inputs td:nth-child(2) { min-width: 8rem; } sub, sup { line-height: 0; } section.band p { margin: .2rem 0 .7rem; }
td.bar { width: 34%; } td.bar i { display: block; height: .62rem; margin-top: .42rem; background: var(--blue); border-radius: 0 3px 3px 0; min-width: 2px; }
code, .digest { font-family: ui-monospace, "DejaVu Sans Mono", Menlo, Consolas, monospace; font-size: .84rem; }
.num { white-space: nowrap; }
.cause { padding: .2rem 0 1.6rem; } .cause + .cause { border-top: 1px dashed var(--line); padding-top: 1.2rem; }
.cause > header { display: flex; flex-wrap: wrap; gap: .2rem 1rem; align-items: baseline; }
.cause h3 { margin: 0; font-size: 1.22rem; } .cause .tally { font-weight: 600; }
.cause .why { margin: .35rem 0 .5rem; max-width: 60rem; }
.cause .columns { display: grid; grid-template-columns: minmax(0, 1fr) minmax(0, 1fr); gap: .4rem 2.2rem; margin-top: .5rem; }
figure { margin: .5rem 0 .2rem; } .plates { display: grid; grid-template-columns: 640fr 340fr; gap: .9rem; }
.plates > :only-child { grid-column: 1 / -1; max-width: 46rem; }
figcaption { color: var(--soft); font-size: .87rem; margin-top: .3rem; }
svg.view { width: 100%; height: auto; display: block; background: var(--tint); border-radius: 6px; }
svg.chart { width: 100%; max-width: 46rem; height: auto; display: block; }
svg text { fill: var(--ink); font: 12px system-ui, "Segoe UI", "DejaVu Sans", sans-serif; }
.s-ground { fill: var(--sheet); } .s-rule { stroke: var(--line); } .s-axis { stroke: var(--soft); } .s-step { stroke: var(--blue); }
.s-point { fill: var(--blue); } .s-jump { stroke: var(--open); } .chart .s-step { stroke-width: 2.5; }
.c-more { stroke: var(--open); } .c-fewer { stroke: var(--ring); } .c-cross { stroke: var(--ring); }
.c-found { fill: var(--sheet); stroke: var(--heed); stroke-width: 2; } .c-wrong { fill: none; stroke: var(--ring); stroke-width: 2.6; }
.c-open { fill: var(--sheet); stroke: var(--open); stroke-dasharray: 3 2; } svg text.c-strong { font-weight: 650; font-size: 13px; }
.v-link { fill: none; stroke: var(--soft); stroke-width: .7; opacity: .5; } .v-link.v-near { stroke-width: 1.3; opacity: .8; }
.v-dot { fill: none; stroke: var(--soft); stroke-width: 2; stroke-linecap: round; opacity: .6; } .v-dot.v-near { stroke-width: 6; }
.v-part { fill: none; stroke: var(--blue); stroke-width: 3.2; stroke-linecap: round; } .v-part.v-near { stroke-width: 8; }
.v-moved { fill: none; stroke: var(--orange); stroke-width: 1.05; stroke-dasharray: 5 2.5; opacity: .85; }
.v-ghost { fill: none; stroke: var(--orange); stroke-width: 2; stroke-linecap: round; opacity: .7; }
.v-arrow { fill: none; stroke: var(--orange); stroke-width: 1.9; stroke-linecap: round; stroke-linejoin: round; }
.v-ring { fill: none; stroke: var(--ring); stroke-width: 2.4; } .v-lead { stroke: var(--ring); fill: none; stroke-width: 1.1; }
.v-tie { stroke: var(--soft); fill: none; stroke-width: .9; }
text.v-label { font-weight: 650; font-size: 13px; fill: var(--ring); paint-order: stroke; stroke: var(--tint); stroke-width: 4px; }
text.v-number { font-size: 13px; paint-order: stroke; stroke: var(--tint); stroke-width: 3px; }
.v-triad path, .v-bar path { stroke: var(--soft); fill: none; stroke-width: 1.4; } .v-triad text, .v-bar text { fill: var(--soft); font-size: 11px; }
.v-field { fill: none; stroke-width: 3.4; stroke-linecap: round; }
.v-0 { stroke: var(--f0); } .v-1 { stroke: var(--f1); } .v-2 { stroke: var(--f2); } .v-3 { stroke: var(--f3); } .v-4 { stroke: var(--f4); } .v-5 { stroke: var(--f5); }
.scale { display: flex; flex-wrap: wrap; gap: .2rem 1rem; } .scale svg { width: 1.1rem; height: .8rem; vertical-align: -1px; background: var(--tint); border-radius: 3px; }
.c-bar { fill: var(--blue); } .c-bar.c-heed { fill: var(--orange); } .c-bar.c-alarm { fill: var(--ring); }
.c-axis { stroke: var(--soft); fill: none; } .c-level { stroke: var(--ring); fill: none; stroke-dasharray: 4 3; } .c-step { stroke: var(--blue); fill: none; stroke-width: 2.2; }
svg text.c-small { font-size: 11px; fill: var(--soft); }
footer { border-top: 3px double var(--line); margin-top: .8rem; padding-top: .7rem; color: var(--soft); font-size: .87rem; }
@media screen and (max-width: 52rem) {
  main { padding: 1.2rem 1.1rem 2rem; }
  section.band { grid-template-columns: minmax(0, 1fr); } section.band > h2 { margin-bottom: .5rem; }
  .verdict { grid-template-columns: 2.8rem 1fr; gap: 0 .9rem; } .verdict svg { width: 2.8rem; height: 2.8rem; } .verdict .lead { font-size: 1.28rem; }
  td.digest { min-width: 17rem; }
  .cause .columns { grid-template-columns: minmax(0, 1fr); } dl { grid-template-columns: 1fr; gap: 0; } dd { margin-bottom: .45rem; }
}
@media screen and (max-width: 42rem) { .wide { display: none; } .narrow { display: block; } .narrow > svg { max-width: 30rem; }
  .plates { grid-template-columns: minmax(0, 1fr); } .plates > svg.view + svg.view { max-width: 24rem; } }
@media screen and (max-width: 30rem) {
  .plates > svg.view:first-child text.v-label { font-size: 20px; stroke-width: 6px; }
  .plates > svg.view:first-child .v-triad text, .plates > svg.view:first-child .v-bar text { font-size: 18px; }
}
@media print {
  :root { color-scheme: light; --paper: #fff; --sheet: #fff; --ink: #111; --soft: #444; --line: #bbb; --tint: #f6f5f2; --blue: #17608f;
    --orange: #c4560a; --ring: #7d1d4f; --clear: #17608f; --heed: #b2470a; --open: #6b5a2a; --f0: #a9bdcb; --f1: #7da9c6; --f2: #4a8ab6; --f3: #1f5f8f; --f4: #b85a14; --f5: #7d1d4f; }
  @page { size: A4; margin: 16mm 15mm; }
  body { font-size: 10pt; } main { padding: 0; max-width: none; min-height: 0; }
  section.band { display: block; padding: .7rem 0; } section.band > h2 { margin-bottom: .3rem; }
  .verdict { padding: 1.1rem 0 .9rem; } .verdict .lead { font-size: 1.4rem; } td, th { padding: .12rem .7rem .12rem 0; }
  .cause .columns { gap: .4rem 1.4rem; } .plates { gap: .5rem; } svg.chart { max-width: 36rem; } .cause { padding-bottom: .7rem; }
  figure, tr, li, .cause .columns, .cause > header, .verdict, .wide, table.inputs, dl { break-inside: avoid; } h2, h3, .why { break-after: avoid; }
  * { -webkit-print-color-adjust: exact; print-color-adjust: exact; }
}
)css";

}  // namespace stanchion
