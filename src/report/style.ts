import { themeVariables } from './palette.js';

/** The page's style sheet. Text 16 px and larger rhythm on screens; black on white, unbroken figures on paper. */
export const styleSheet = `
:root{${themeVariables('light')}--raised:color-mix(in oklab,var(--paper) 94%,var(--one));color-scheme:light}
@media (prefers-color-scheme:dark){:root{${themeVariables('dark')}--raised:color-mix(in oklab,var(--paper) 90%,var(--one));color-scheme:dark}}
*{box-sizing:border-box}
html{font-size:100%;scroll-behavior:smooth}
body{margin:0;background:var(--paper);color:var(--ink);font:1rem/1.55 system-ui,"Segoe UI",Roboto,"Liberation Sans",sans-serif;font-variant-numeric:tabular-nums}
h1,h2,h3{font-family:Charter,"Iowan Old Style","Palatino Linotype",Palatino,"Bitstream Charter",Georgia,"Liberation Serif",serif;font-weight:600;line-height:1.2;overflow-wrap:anywhere;text-wrap:balance}
header{padding:3rem clamp(1rem,4vw,4rem) 0;max-width:94rem;margin:auto}
.kind{margin:0;color:var(--soft);letter-spacing:.02em}
.kind b{color:var(--ink);font-weight:650}
h1{margin:.35rem 0 .4rem;font-size:clamp(1.9rem,1.3rem + 2.2vw,3.1rem);letter-spacing:-.01em}
.subtitle{margin:0;color:var(--soft);max-width:70ch;overflow-wrap:anywhere}
.verdict{display:grid;grid-template-columns:auto 1fr;gap:.2rem 1rem;align-items:center;margin:1.8rem 0 0;padding:1rem 1.25rem;background:var(--raised);border:1px solid var(--rule);border-left:.45rem solid var(--v)}
.verdict svg{width:2.2rem;height:2.2rem;fill:none;stroke:var(--v);stroke-width:3}
.verdict p{margin:0;font-size:1.15rem;max-width:78ch;overflow-wrap:anywhere}
.verdict strong{color:var(--v)}
.good{--v:var(--one)}.watch{--v:var(--two)}.bad{--v:var(--three)}
.bad{border-left-style:double;border-left-width:.7rem}.watch{border-left-style:dashed}
.sheet{display:grid;grid-template-columns:minmax(0,1fr);gap:0 3rem;padding:0 clamp(1rem,4vw,4rem) 3rem;max-width:94rem;margin:auto}
nav{margin-top:2rem}
nav ol{display:flex;flex-wrap:wrap;gap:.15rem 1.2rem;list-style:none;counter-reset:n;margin:0;padding:0}
nav li{counter-increment:n}
nav a{display:block;padding:.3rem 0;color:var(--soft);text-decoration:none;border-bottom:1px solid transparent}
nav a::before{content:counter(n) "  ";color:var(--one);font-weight:650;white-space:pre}
nav a:hover{color:var(--ink);border-bottom-color:var(--one)}
main{min-width:0;max-width:62rem}
section{padding-top:2.2rem;counter-increment:s}
main{counter-reset:s}
h2{margin:0 0 1rem;padding-top:.7rem;border-top:3px solid var(--ink);font-size:1.6rem}
h2::before{content:counter(s);display:inline-block;min-width:2.2rem;color:var(--one)}
h3{margin:0;font-size:1.12rem}
p{margin:.6rem 0;max-width:74ch}
section>ul{margin:.6rem 0;padding-left:1.2rem;max-width:80ch}
section>ul li{margin:.3rem 0;overflow-wrap:anywhere}
section>ul li::marker{color:var(--one)}
dl.facts{display:grid;grid-template-columns:repeat(auto-fill,minmax(13.5rem,1fr));gap:1.3rem 2rem;margin:1rem 0 1.6rem}
dl.facts div{border-top:1px solid var(--rule);padding-top:.5rem}
dl.facts dt{color:var(--soft);font-size:.9rem}
dl.facts dd{margin:0}
dl.facts .value{font-size:1.45rem;font-weight:600;letter-spacing:-.01em;overflow-wrap:anywhere}
dl.facts .note{color:var(--soft);font-size:.88rem;line-height:1.4}
figure,.tabled{margin:1.6rem 0 2.2rem;position:relative}
.head{display:flex;gap:1rem;justify-content:space-between;align-items:baseline;margin-bottom:.35rem}
figcaption,.note-below{color:var(--soft);font-size:.92rem;max-width:80ch;margin-top:.4rem}
button{font:inherit;font-size:.86rem;color:var(--ink);background:none;border:1px solid var(--rule);border-radius:2px;padding:.12rem .6rem;cursor:pointer;white-space:nowrap}
button:hover{border-color:var(--one);background:var(--raised)}
a:focus-visible,button:focus-visible,[tabindex]:focus-visible{outline:3px solid var(--two);outline-offset:2px}
.plot{overflow-x:auto;position:relative}
.plot svg{display:block;width:100%;min-width:34rem;height:auto;cursor:crosshair}
.plot text{font-family:inherit;font-size:13px;fill:var(--ink)}
.plot .tick{font-size:12px;fill:var(--soft)}
.plot .title{fill:var(--soft)}
.plot .mark-label{font-size:12px;fill:var(--mark);paint-order:stroke;stroke:var(--paper);stroke-width:4px;stroke-linejoin:round}
.plot .grid{stroke:var(--rule);stroke-width:.8}
.plot .axis{stroke:var(--soft);fill:none}
.plot .mark{stroke:var(--mark);stroke-width:1.3;stroke-dasharray:1 4;stroke-linecap:round}
.plot image{image-rendering:pixelated}
.plot .wall{stroke:var(--ink);stroke-width:2.4;fill:none;stroke-linecap:round}
.plot .boundary{stroke:var(--soft);stroke-width:.9;fill:none}
.plot .contour{fill:none;vector-effect:non-scaling-stroke}
.plot .contour.under{stroke:#fff;stroke-width:2.6}
.plot .contour.over{stroke:#161616;stroke-width:1.1;stroke-dasharray:5 3}
.plot .contour-key{stroke:var(--ink);stroke-width:1.6;stroke-dasharray:5 3}
.plot .probe{fill:#fff;stroke:#111;stroke-width:2}
.plot .probe-label{font-size:12px;fill:#111;paint-order:stroke;stroke:#fff;stroke-width:3.5px;stroke-linejoin:round}
.plot .cross{stroke:var(--ink);stroke-width:1;pointer-events:none}
.plot .on-picture.under{stroke:#111;stroke-width:4}
.plot .on-picture.over{stroke:#fff;stroke-width:1.6}
.plot .dot{fill:var(--paper);stroke:var(--ink);stroke-width:2;pointer-events:none}
.reading{position:absolute;z-index:3;max-width:19rem;padding:.4rem .65rem;background:var(--ink);color:var(--paper);font-size:.86rem;line-height:1.4;pointer-events:none;border-radius:2px;white-space:pre-line;overflow-wrap:anywhere}
.reading[hidden]{display:none}
.legend{display:flex;flex-wrap:wrap;gap:.15rem 1.3rem;list-style:none;margin:.1rem 0 .4rem;padding:0;font-size:.92rem}
.legend li{display:flex;align-items:center;gap:.5rem;overflow-wrap:anywhere}
.legend .key{width:34px;height:12px;fill:none;flex:none}
.scroll{overflow-x:auto}
table{border-collapse:collapse;font-size:.94rem;min-width:min(100%,30rem)}
th,td{padding:.36rem 1rem .36rem 0;text-align:left;vertical-align:top;border-bottom:1px solid var(--rule);max-width:34rem;overflow-wrap:break-word}
thead th{border-bottom:2px solid var(--ink);font-weight:600;vertical-align:bottom}
thead small{display:block;color:var(--soft);font-weight:400;font-size:.82rem}
tbody th{font-weight:500}
.number{text-align:right;white-space:nowrap}
.short{white-space:nowrap}
.long{min-width:17rem}
.caution{margin:2rem 0 0;padding:.9rem 0 .9rem 1.1rem;border-left:.45rem solid var(--two);max-width:74ch;font-size:1.05rem}
footer{border-top:1px solid var(--rule);margin-top:2.5rem;padding-top:.8rem;color:var(--soft);font-size:.9rem;overflow-wrap:anywhere}
footer p{margin:.15rem 0;max-width:none}
@media (min-width:72rem){
.sheet{grid-template-columns:13rem minmax(0,1fr)}
nav{margin:0;padding-top:2.9rem}
nav ol{position:sticky;top:1.5rem;display:block}
nav a{padding:.42rem 0}
}
@media (max-width:40rem){header{padding-top:1.5rem}.verdict{grid-template-columns:1fr}.head{flex-wrap:wrap}}
@media (prefers-reduced-motion:reduce){html{scroll-behavior:auto}}
@media print{
:root{${themeVariables('light')}--paper:#fff;--raised:#fff;color-scheme:light}
@page{margin:16mm 14mm}
body{font-size:10pt}
nav,button,.reading{display:none}
header,.sheet{padding-left:0;padding-right:0;max-width:none}
header{padding-top:0}
.sheet{display:block}
section{padding-top:1rem}
h2{font-size:15pt;break-after:avoid}
figure,.verdict,dl.facts div,tr{break-inside:avoid}
.plot,.scroll{overflow:visible}
.plot svg{min-width:0;max-width:100%}
.plot image,.legend .key{print-color-adjust:exact;-webkit-print-color-adjust:exact}
}
`;
