/** The page's look: calm, legible, light and dark, on paper too. Colour is never the only sign. */
export const STYLE = `
:root{color-scheme:light dark;--ground:#fbfaf7;--ink:#22262b;--soft:#565d66;--rule:#d5d2c9;--panel:#f2efe8;--before:#8a5a00;--after:#0b5c8a;--removed:#a3294f;--good:#1e6b3a;--bad:#a1201b}
@media (prefers-color-scheme:dark){:root{--ground:#16191d;--ink:#e7e5df;--soft:#a9b0b8;--rule:#3a4048;--panel:#1f2329;--before:#e0a84a;--after:#74bdec;--removed:#f08aa8;--good:#7fd09a;--bad:#ff9a90}}
*{box-sizing:border-box}
body{margin:0;background:var(--ground);color:var(--ink);font:16px/1.5 Georgia,"Times New Roman",serif}
main,header,footer{max-width:62rem;margin:0 auto;padding:0 1rem}
header{padding-top:1.5rem}
h1{font-size:1.9rem;line-height:1.2;margin:0 0 .3rem}
h2{font-size:1.35rem;margin:2.2rem 0 .5rem;border-top:1px solid var(--rule);padding-top:1rem}
h3{font-size:1.1rem;margin:1.4rem 0 .4rem}
p,li{max-width:46rem;overflow-wrap:anywhere}
.lead{color:var(--soft);margin-top:0}
.verdict{border:2px solid;border-radius:.4rem;padding:.7rem 1rem;margin:1rem 0;background:var(--panel)}
.verdict p{margin:.25rem 0}
.verdict.met{border-color:var(--good)}
.verdict.unmet{border-color:var(--bad)}
.verdict strong{font-size:1.15rem}
.met strong{color:var(--good)}
.unmet strong{color:var(--bad)}
.facts{display:grid;grid-template-columns:repeat(auto-fit,minmax(13rem,1fr));gap:.7rem;margin:1rem 0;padding:0}
.facts div{background:var(--panel);border-radius:.4rem;padding:.6rem .8rem}
.facts dt{color:var(--soft);font-size:.9rem}
.facts dd{margin:0;font-size:1.1rem;overflow-wrap:anywhere}
.wide{overflow-x:auto;margin:.8rem 0}
.pairs table{min-width:0}
.pairs td,.pairs th{text-align:left}
.pairs td{white-space:normal}
table{border-collapse:collapse;font:14px/1.4 system-ui,sans-serif;min-width:24rem}
caption{text-align:left;color:var(--soft);padding:.2rem 0}
th,td{padding:.25rem .7rem .25rem 0;text-align:right;border-bottom:1px solid var(--rule);white-space:nowrap;font-variant-numeric:tabular-nums}
th[scope=row],th:first-child{text-align:left;font-weight:600;white-space:normal}
figure{margin:1rem 0;break-inside:avoid}
figcaption{color:var(--soft);font-size:.92rem}
.plot{width:100%;height:auto;max-width:52rem;display:block}
.plot text{font:13px system-ui,sans-serif;fill:var(--ink)}
.plot .label{fill:var(--soft)}
.grid{stroke:var(--rule);stroke-width:1;fill:none}
.axis{stroke:var(--soft);stroke-width:1.2;fill:none}
.trace{fill:none;stroke-width:1.8;stroke-linejoin:round}
.trace.before{stroke:var(--before);stroke-dasharray:7 4}
.trace.after{stroke:var(--after)}
.trace.removed{stroke:var(--removed);stroke-dasharray:2 3}
.band.removed{fill:var(--removed);fill-opacity:.35;stroke:none}
.trace.limit{stroke:var(--ink);stroke-width:1.2}
.band.before{fill:var(--before);fill-opacity:.35;stroke:none}
.state.whole{fill:var(--after)}
.state.part{fill:var(--before)}
.state.none{fill:var(--removed)}
.kept{fill:var(--good);fill-opacity:.15}
.mark{fill:var(--removed);stroke:var(--ground);stroke-width:1}
.interval{stroke:var(--ink);stroke-width:1.4;fill:none}
.legend{margin:.2rem 0;font:14px system-ui,sans-serif}
.legend span{white-space:nowrap;margin-right:1rem}
.legend svg{width:34px;height:10px;margin-right:.4rem}
nav ol{padding-left:1.2rem;columns:2;max-width:46rem}
a{color:var(--after)}
details{margin:.6rem 0}
pre{background:var(--panel);padding:.7rem;overflow-x:auto;font-size:13px;max-width:100%}
.digest{font:13px ui-monospace,monospace;overflow-wrap:anywhere;white-space:normal}
:focus-visible{outline:3px solid var(--after);outline-offset:2px}
@media (max-width:40rem){nav ol{columns:1}h1{font-size:1.5rem}.plot text{font-size:20px}.wide{max-width:calc(100vw - 2rem)}}
@media print{:root{--ground:#fff;--ink:#000;--soft:#333;--panel:#f4f4f4;--rule:#bbb;--before:#7a4f00;--after:#004a73;--removed:#8b1f42}body{font-size:11pt}nav{display:none}h2,h3{break-after:avoid}tr,figure{break-inside:avoid}details>*{display:block}.wide{overflow:visible}th,td{white-space:normal}}
`;
