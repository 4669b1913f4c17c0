"""The look of report.html: one sheet for light, dark and print; nothing is fetched."""

__all__ = ["STYLE"]

_LIGHT = """--paper:#fbf8f1;--card:#fffdf8;--ink:#2b261e;--soft:#6b6252;--rule:#ddd3bf;
--copper:#a2531f;--good:#2c6e49;--warn:#8a6100;--bad:#b3201f;--head:#f3ecdd;
--c0:#a2531f;--c1:#1f6f8b;--c2:#5b7f2b;--c3:#7a4a91;--c4:#b08900;--c5:#52606d;
--b-paper:#f7f2e6;--b-board:#e6dcc3;--b-board-pen:#5c5140;--b-cutout:#f7f2e6;--b-cutout-pen:#5c5140;
--b-bottom:#b98f7a;--b-maskb-pen:#3d5c80;--b-pour:#dcaa82;--b-ground:#d39b70;--b-line:#ad5f2c;--b-pad:#c9a24b;
--b-pad-pen:#8a6a22;--b-opening-pen:#3f7f70;--b-paste:#b9bcbe;--b-paste-pen:#7d8286;--b-via:#f7f2e6;
--b-via-pen:#7d4a22;--b-hole:#f7f2e6;--b-hole-pen:#5c5140;--b-body-pen:#4a4438;--b-ink:#2f2a22;--b-port:#2d5f8a;
--b-name-line:#fff6e8;--b-chosen:#0b5a7a;--b-halo:#ffffff;--b-ruler:#7a1f4f;--b-error:#c1272d;
--b-warning:#a86f00;--b-note:#5a5346;--b-waived:#5a5346"""

_DARK = """--paper:#1d1a16;--card:#25211c;--ink:#eee6d8;--soft:#b3a893;
--rule:#453d32;--copper:#e09a63;--good:#7fc49a;--warn:#e6b84d;--bad:#ff8f86;--head:#302a23;
--c0:#e09a63;--c1:#6fc0dc;--c2:#a8cf72;--c3:#c79ade;--c4:#ecc94b;--c5:#b5c1cc;
--b-paper:#1f1b17;--b-board:#3a3328;--b-board-pen:#b7a98d;--b-cutout:#1f1b17;--b-cutout-pen:#b7a98d;
--b-bottom:#6e4d3f;--b-maskb-pen:#88aede;--b-pour:#8a5f3f;--b-ground:#9a6a45;--b-line:#e0894a;--b-pad:#e3c36c;
--b-pad-pen:#6b5217;--b-opening-pen:#7ccab6;--b-paste:#83888c;--b-paste-pen:#c3c8cc;--b-via:#1f1b17;
--b-via-pen:#e0b48e;--b-hole:#1f1b17;--b-hole-pen:#b7a98d;--b-body-pen:#d8ccb4;--b-ink:#f1e8d6;--b-port:#8fc4ee;
--b-name-line:#2a1606;--b-chosen:#8fdcff;--b-halo:#14110e;--b-ruler:#ffb3d4;--b-error:#ff8f86;
--b-warning:#f0bd45;--b-note:#c9bda6;--b-waived:#c9bda6"""

STYLE = (
    f"""
:root{{color-scheme:light;{_LIGHT}}}
@media screen{{:root[data-theme=dark]{{color-scheme:dark;{_DARK}}}}}
@media screen and (prefers-color-scheme:dark){{:root:not([data-theme=light]){{color-scheme:dark;{_DARK}}}}}
"""
    + """
*{box-sizing:border-box}
body{margin:0;background:var(--paper);color:var(--ink);
font:15px/1.5 "Source Sans 3","Segoe UI",Helvetica,Arial,"DejaVu Sans",sans-serif}
main,header,footer{max-width:78rem;margin:0 auto;padding:0 1.2rem}
header{padding-top:1.6rem}
h1{font-size:1.7rem;margin:0;line-height:1.2}
h2{font-size:1.15rem;margin:2.2rem 0 .6rem;padding-bottom:.25rem;border-bottom:2px solid var(--copper)}
h3{font-size:1rem;margin:1.2rem 0 .3rem}
p{margin:.4rem 0;max-width:60rem}
a{color:var(--copper)}
.soft{color:var(--soft)}
nav{display:flex;flex-wrap:wrap;gap:.2rem 1rem;margin:.8rem 0 0;font-size:.93rem}
.verdict{margin:1rem 0 0;padding:.8rem 1rem;border-left:6px solid var(--good);background:var(--card)}
.verdict strong{font-size:1.08rem}
.verdict.bad{border-color:var(--bad)}
.verdict.warn{border-color:var(--warn)}
figure{margin:1rem 0;padding:.4rem;border:1px solid var(--rule);background:#f7f2e6}
figure svg{display:block;width:100%;height:auto;max-height:80vh}
.live #still,#theme,.viewer{display:none}
.live #theme{display:block;float:right}
.live .viewer{display:grid;grid-template-columns:minmax(0,1fr) 20rem;gap:0 1rem;margin:1rem 0}
.stage{border:1px solid var(--rule);background:var(--b-paper);display:flex;flex-direction:column}
canvas{display:block;flex:1;width:100%;min-height:24rem;max-height:72vh;height:auto;aspect-ratio:var(--shape,2);
touch-action:none;cursor:grab}
canvas.measuring{cursor:crosshair}
.tools{display:flex;flex-wrap:wrap;gap:.3rem;align-items:center;padding:.3rem;background:var(--head);
border-bottom:1px solid var(--rule);min-height:2.9rem}
output{font-variant-numeric:tabular-nums;padding-left:.4rem}
button{font:inherit;color:var(--ink);background:var(--card);border:1px solid var(--soft);border-radius:3px;
padding:.2rem .7rem;min-height:2.1rem;min-width:2.1rem;cursor:pointer}
button[aria-pressed=true]{background:var(--copper);color:var(--card);border-color:var(--copper)}
.side{display:flex;flex-direction:column;gap:.6rem;min-width:0;font-size:.92rem}
#panel{flex:1 1 0;min-height:13rem;overflow:auto;border:1px solid var(--rule);background:var(--card);
padding:.2rem .8rem}
#panel h3{margin:.5rem 0 .2rem}
dl{display:grid;grid-template-columns:minmax(30%,1fr) fit-content(62%);gap:.1rem .8rem;margin:.2rem 0}
dt{color:var(--soft)}
dt.head{grid-column:1/-1;margin-top:.4rem;font-weight:600;color:var(--ink)}
dd{margin:0;overflow-wrap:anywhere;font-variant-numeric:tabular-nums}
fieldset{border:0;border-top:1px solid var(--rule);margin:0;padding:.4rem .6rem;display:flex;flex-wrap:wrap;
gap:.1rem 1.1rem;background:var(--head);font-size:.92rem;min-width:0}
fieldset label{padding:.12rem 0;white-space:nowrap}
input{accent-color:var(--copper)}
.unseen{position:absolute;width:1px;height:1px;overflow:hidden;clip-path:inset(50%);white-space:nowrap}
.live tbody tr:has([data-zoom]){cursor:pointer}
tr.chosen th,tr.chosen td{background:var(--head)}
tr.chosen th:first-child{box-shadow:inset 4px 0 var(--copper)}
.plots{display:flex;flex-wrap:wrap;gap:.5rem 1.5rem;align-items:flex-start}
.plots svg.chart{flex:1 1 26rem}
.plots svg.smith{flex:0 1 30rem}
.chart .f{fill:none}
.chart .s{font-size:10px;fill:var(--soft)}
.chart .cursor{stroke:var(--ink);stroke-width:1;stroke-dasharray:2 2}
.chart .off{display:none}
.chart .dot{stroke-width:2;fill:none}
.chart .dot.drawn{fill:var(--ink)}
.chart [role=button]{cursor:pointer}
.chart [aria-pressed=false]{opacity:.4}
.reading label{display:block;max-width:40rem}
.reading input{width:min(30rem,60vw);vertical-align:middle}
.watch{padding:.3rem 1.2rem;background:var(--head);border-bottom:1px solid var(--rule);position:sticky;top:0;
z-index:1;max-height:45vh;overflow:auto;font-size:.92rem}
.watch h2{margin:.2rem 0;border:0;padding:0;color:var(--bad)}
.watch p,.watch ul{margin:.1rem 0}
.watch[data-state=wrong]{border-bottom:4px solid var(--bad)}
.watch[data-state=lost]{border-bottom:4px solid var(--warn)}
.scroll{overflow-x:auto;margin:.5rem 0}
.scroll:focus-visible,a:focus-visible,button:focus-visible,canvas:focus-visible,input:focus-visible,
[role=button]:focus-visible,summary:focus-visible{outline:2px solid var(--copper);outline-offset:2px}
table{border-collapse:collapse;background:var(--card);font-size:.9rem;min-width:24rem}
caption{text-align:left;color:var(--soft);padding:.2rem 0}
th,td{padding:.25rem .6rem;text-align:left;border-bottom:1px solid var(--rule);vertical-align:top}
thead th{background:var(--head);vertical-align:bottom}
tbody th{font-weight:600;white-space:nowrap}
td{white-space:nowrap}
td.t{white-space:normal;min-width:17rem}
.n{text-align:right;font-variant-numeric:tabular-nums;white-space:nowrap}
thead .n{white-space:normal}
.beside{display:flex;flex-wrap:wrap;gap:0 2rem;align-items:flex-start}
td small{color:var(--soft)}
.error{color:var(--bad);font-weight:600}
.warning{color:var(--warn);font-weight:600}
.note{color:var(--soft)}
.caution{border:1px solid var(--warn);background:var(--card);padding:.3rem 1rem}
svg.chart{display:block;width:100%;max-width:56rem;height:auto;font-size:12px}
.chart text{fill:var(--ink)}
.chart .m{text-anchor:middle}
.chart .e{text-anchor:end}
.chart .g{stroke:var(--rule)}
.chart .band{fill:var(--copper);opacity:.16}
.chart .d,.chart .w{fill:none;stroke-width:1.8}
.chart .w{stroke-dasharray:6 4;stroke-width:1.3}
.chart .ink{stroke:var(--soft)}
.chart .t0{stroke:var(--c0)}.chart .t1{stroke:var(--c1)}.chart .t2{stroke:var(--c2)}
.chart .t3{stroke:var(--c3)}.chart .t4{stroke:var(--c4)}.chart .t5{stroke:var(--c5)}
footer{padding:2rem 1.2rem;color:var(--soft);font-size:.88rem}
@media (max-width:60rem){.live .viewer{grid-template-columns:minmax(0,1fr)}
.side{margin-top:.6rem}#panel{flex:none;height:13rem}canvas{min-height:15rem;max-height:60vh}}
@media (max-width:40rem){body{font-size:14px}h1{font-size:1.35rem}
main,header,footer{padding-left:.7rem;padding-right:.7rem}}
@page{margin:14mm}
@media print{:root{--paper:#fff;--card:#fff;--ink:#000;--soft:#444;--rule:#bbb;--head:#eee;--copper:#7a3d14;
--good:#1d5033;--warn:#6b4b00;--bad:#8f1514}
.live .viewer,.live #theme,.watch,.reading,.cursor,.dot{display:none}
.live #still{display:block}nav{display:none}body{font-size:10pt}
main,header,footer{max-width:none;padding:0}.scroll{overflow:visible}table{font-size:8pt}
tr,figure,svg.chart{break-inside:avoid}h2,h3{break-after:avoid}thead{display:table-header-group}}
"""
)
"""Style sheet of the report page."""
