"""The look of report.html: one sheet for light, dark and print; nothing is fetched."""

__all__ = ["STYLE"]

STYLE = """
:root{color-scheme:light dark;--paper:#fbf8f1;--card:#fffdf8;--ink:#2b261e;--soft:#6b6252;--rule:#ddd3bf;
--copper:#a2531f;--good:#2c6e49;--warn:#8a6100;--bad:#b3201f;--head:#f3ecdd;
--c0:#a2531f;--c1:#1f6f8b;--c2:#5b7f2b;--c3:#7a4a91;--c4:#b08900;--c5:#52606d}
@media (prefers-color-scheme:dark){:root{--paper:#1d1a16;--card:#25211c;--ink:#eee6d8;--soft:#b3a893;
--rule:#453d32;--copper:#e09a63;--good:#7fc49a;--warn:#e6b84d;--bad:#ff8f86;--head:#302a23;
--c0:#e09a63;--c1:#6fc0dc;--c2:#a8cf72;--c3:#c79ade;--c4:#ecc94b;--c5:#b5c1cc}}
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
.scroll{overflow-x:auto;margin:.5rem 0}
.scroll:focus-visible,a:focus-visible{outline:2px solid var(--copper);outline-offset:2px}
table{border-collapse:collapse;background:var(--card);font-size:.9rem;min-width:24rem}
caption{text-align:left;color:var(--soft);padding:.2rem 0}
th,td{padding:.25rem .6rem;text-align:left;border-bottom:1px solid var(--rule);vertical-align:top}
thead th{background:var(--head);vertical-align:bottom}
tbody th{font-weight:600;white-space:nowrap}
td{white-space:nowrap}
td.t{white-space:normal;min-width:17rem}
.n{text-align:right;font-variant-numeric:tabular-nums;white-space:nowrap}
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
@media (max-width:40rem){body{font-size:14px}h1{font-size:1.35rem}
main,header,footer{padding-left:.7rem;padding-right:.7rem}}
@media print{:root{--paper:#fff;--card:#fff;--ink:#000;--soft:#444;--rule:#bbb;--head:#eee;--copper:#7a3d14;
--good:#1d5033;--warn:#6b4b00;--bad:#8f1514}nav{display:none}body{font-size:10pt}
main,header,footer{max-width:none;padding:0}.scroll{overflow:visible}table{font-size:8pt}
tr,figure,svg.chart{break-inside:avoid}h2,h3{break-after:avoid}thead{display:table-header-group}}
"""
"""Style sheet of the report page."""
