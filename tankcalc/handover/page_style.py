"""How the page looks, on a screen and on paper: black on white, weight and signs, no colour."""

STYLE = """
:root{color-scheme:light}
*{box-sizing:border-box}
body{margin:0;background:#fff;color:#111;font:14px/1.45 system-ui,"Segoe UI",Roboto,"Noto Sans",
"DejaVu Sans",sans-serif;font-variant-numeric:tabular-nums}
main{max-width:1000px;margin:0 auto;padding:24px 20px 40px}
h1{font-size:22px;line-height:1.25;margin:0 0 12px}
h2{font-size:15px;margin:26px 0 6px;padding-bottom:3px;border-bottom:2px solid #111}
h3{font-size:15px;margin:0 0 8px;display:flex;gap:10px;align-items:baseline}
h3 span{font-weight:400;color:#444}
h3 .state{margin-left:auto;font-size:12.5px}
p{margin:4px 0}
.banner{border:2px solid #111;padding:5px 10px;font-weight:600;margin:0 0 8px}
.nothing{color:#444}
dl{margin:0}
dl div{display:flex;flex-direction:column}
dt{font-size:11.5px;color:#555}
dd{margin:0}
.head{display:grid;grid-template-columns:repeat(auto-fill,minmax(190px,1fr));gap:6px 20px}
.figures{display:grid;grid-template-columns:repeat(auto-fill,minmax(126px,1fr));gap:6px 12px}
.figures dd{font-weight:600;white-space:nowrap}
.give{display:block;font-weight:400;font-size:11.5px;color:#555}
table{border-collapse:collapse;width:100%}
td,th{padding:3px 10px 3px 0;text-align:left;vertical-align:top}
th{font-size:11.5px;font-weight:400;color:#555;border-bottom:1px solid #888}
tr+tr td{border-top:1px solid #ddd}
td{overflow-wrap:anywhere}
.number{text-align:right;white-space:nowrap}
.overview td:first-child{font-weight:600;white-space:nowrap}
.overview td,.overview th{padding-right:14px}
.items .when{white-space:nowrap;width:1%}
.items .tank{white-space:nowrap;width:1%;font-weight:600}
.items .what{white-space:nowrap;width:1%}
.kind{color:#444}
.urgent .kind{color:#111;font-weight:600}
.mark{display:inline-block;font-weight:700;border:1.5px solid #111;border-radius:50%;width:15px;
height:15px;line-height:12px;text-align:center;font-size:11px;margin-right:6px}
.card{border:1px solid #bbb;border-radius:4px;padding:12px 14px;margin:12px 0;
break-inside:avoid}
.trends{display:grid;grid-template-columns:464fr 330fr;gap:12px;margin-top:10px}
.trend{width:100%;height:auto;font-size:9.5px;fill:#111}
.key{font-size:11.5px;color:#444}
.trend .shift{fill:#f1f1f1}
.trend line,.trend polyline,.trend path{fill:none;stroke:#111;vector-effect:non-scaling-stroke}
.trend .axis,.trend .tick{stroke-width:1;stroke:#777}
.trend .grid{stroke:#ddd;stroke-width:1}
.trend .limit{stroke-width:1.2;stroke-dasharray:6 3}
.trend .line{stroke-width:1.6}
.trend .none{stroke-width:1.3}
.trend .lead{stroke-width:.7;stroke:#555}
.trend .mid{text-anchor:middle;fill:#555}
.trend .end{text-anchor:end}
.trend .end{fill:#555}
.trend .name{font-weight:600}
.said{margin:10px 0 0;padding:0;list-style:none}
.said li{padding:1px 0}
.sign{display:grid;grid-template-columns:2fr 1fr 2fr;gap:24px;margin:34px 0 0;color:#555;
font-size:11.5px;break-inside:avoid}
.sign span{display:block;border-top:1px solid #111;margin-bottom:3px}
footer{margin-top:30px;padding-top:8px;border-top:1px solid #888;font-size:11.5px;color:#333;
overflow-wrap:anywhere}
@media (max-width:640px){.trends{grid-template-columns:1fr}h3{flex-wrap:wrap}}
@media print{@page{size:A4;margin:13mm 12mm}body{font-size:8.6pt;line-height:1.35}
main{max-width:none;padding:0}h1{font-size:15pt}h2{font-size:11pt;margin-top:16pt}h3{font-size:10.5pt}
dt,.give,th,.key,footer{font-size:7.6pt}td,th{padding:2px 8px 2px 0}
.overview td,.overview th{padding-right:9px}.card{padding:8px 10px;margin:8px 0}
.figures{grid-template-columns:repeat(auto-fill,minmax(102px,1fr));gap:4px 8px}
h2{break-after:avoid}tr{break-inside:avoid}thead{display:table-header-group}
.trend .shift{fill:#f1f1f1;print-color-adjust:exact;-webkit-print-color-adjust:exact}}
"""
