/* The style sheet and the sorting script of report.html. Contrast of text on its ground is at least 4.5 to 1 in the light
 * and in the dark scheme; a verdict carries sign and word besides its colour. Hues (blue, teal, amber, brick) stay apart
 * for colour-blind eyes because they differ in brightness as well. */
#include <stddef.h>

#include "report/page.h"

static const char colours[] =
    ":root{color-scheme:light dark;--paper:#fff;--sheet:#f5f7f9;--ink:#1b2430;--soft:#505b69;--rule:#d8dee6;"
    "--blue:#1660a8;--teal:#00695f;--amber:#8f5000;--red:#a82818;--grey:#6b7280;"
    "--teal-bg:#dff2ee;--amber-bg:#fdeed3;--red-bg:#fbe3de;--grey-bg:#e9ecf0}\n"
    "@media (prefers-color-scheme:dark){:root{--paper:#141a22;--sheet:#1b232d;--ink:#e6ebf1;--soft:#a9b4c2;--rule:#35404d;"
    "--blue:#74b3f0;--teal:#5fd0bf;--amber:#f0b658;--red:#ff9d8a;--grey:#98a3b1;"
    "--teal-bg:#12392f;--amber-bg:#40300f;--red-bg:#47201a;--grey-bg:#2a333e}}\n";
static const char frame[] =
    "*{box-sizing:border-box}html{-webkit-text-size-adjust:100%}\n"
    "body{margin:0;background:var(--paper);color:var(--ink);font:15.5px/1.5 system-ui,-apple-system,'Segoe UI',sans-serif}\n"
    "header,main,footer{max-width:1120px;margin:0 auto;padding:0 24px}\n"
    "header{padding-top:34px}\n"
    "h1{font-size:29px;line-height:1.2;margin:0 0 4px;letter-spacing:-.01em;overflow-wrap:anywhere}\n"
    "h2{font-size:20px;margin:44px 0 6px;padding-top:14px;border-top:2px solid var(--ink)}\n"
    "h3{font-size:15.5px;margin:22px 0 6px}\n"
    "p{margin:6px 0;max-width:78ch}.lead{color:var(--soft)}small,.small{font-size:13px;color:var(--soft)}\n"
    "a{color:var(--blue)}code{font-family:ui-monospace,Menlo,Consolas,monospace;font-size:.92em;overflow-wrap:anywhere}\n"
    "nav ul{display:flex;flex-wrap:wrap;gap:4px 18px;list-style:none;padding:10px 0 0;margin:0;font-size:14px}\n"
    "a:focus-visible,button:focus-visible,summary:focus-visible,.scroll:focus-visible{outline:3px solid var(--blue);"
    "outline-offset:2px}\n";
static const char headline[] =
    ".headline{display:grid;grid-template-columns:repeat(auto-fit,minmax(150px,1fr));gap:12px;margin:20px 0 14px}\n"
    ".tile{background:var(--sheet);border-left:5px solid var(--grey);padding:10px 14px 12px}\n"
    ".tile b{display:block;font-size:27px;line-height:1.15;font-variant-numeric:tabular-nums}\n"
    ".tile.good{border-color:var(--teal)}.tile.bad{border-color:var(--red)}.tile.open{border-color:var(--amber)}\n"
    ".tile span{color:var(--soft);font-size:13.5px}\n"
    "details{margin:12px 0;font-size:14px;color:var(--soft)}summary{cursor:pointer}\n"
    "pre{background:var(--sheet);color:var(--ink);padding:12px 16px;overflow-x:auto;font:13px/1.5 ui-monospace,Menlo,Consolas,"
    "monospace}\n"
    ".badge{display:inline-block;white-space:nowrap;padding:1px 9px 1px 7px;border-radius:3px;font-weight:600;font-size:13.5px}\n"
    ".good.badge{background:var(--teal-bg);color:var(--teal)}.bad.badge{background:var(--red-bg);color:var(--red)}\n"
    ".open.badge{background:var(--amber-bg);color:var(--amber)}.none.badge{background:var(--grey-bg);color:var(--soft)}\n";
static const char tables[] =
    ".scroll{overflow-x:auto;margin:10px 0}\n"
    "table{border-collapse:collapse;font-variant-numeric:tabular-nums;font-size:14.5px;width:100%}\n"
    "th,td{text-align:left;padding:5px 14px 5px 0;border-bottom:1px solid var(--rule);vertical-align:top}\n"
    "thead th{color:var(--soft);font-weight:600;font-size:13px;border-bottom:1px solid var(--soft);vertical-align:bottom}\n"
    ".sort{font-size:13.8px}.sort th[scope=row]{white-space:nowrap}td.n,th.n{text-align:right}td.n{white-space:nowrap}.u,.unit{color:var(--soft);font-weight:400}\n"
    "tbody.sample th{padding-top:16px;font-size:15.5px;border-bottom:0}\n"
    "tbody.sample th small{font-weight:400;margin-left:8px}\n"
    "tbody.sample td:first-child{padding-left:18px}\n"
    "tr.why td{border-bottom:1px solid var(--soft);color:var(--soft);padding-bottom:12px}\n"
    "th button{font:inherit;color:inherit;background:none;border:0;padding:0;cursor:pointer;text-align:inherit}\n"
    "th[aria-sort=ascending] button:after{content:' \\2191'}th[aria-sort=descending] button:after{content:' \\2193'}\n";
static const char pictures[] =
    "figure{margin:14px 0}figcaption{font-size:13.5px;color:var(--soft);max-width:78ch}\n"
    "svg{display:block;width:100%;height:auto;min-width:520px;max-width:1072px}.wide svg{min-width:760px}\n"
    ".charts{display:grid;grid-template-columns:repeat(auto-fill,minmax(min(100%,440px),1fr));gap:10px 28px}\n"
    ".charts figure{overflow-x:auto}.charts svg{min-width:400px}\n"
    ".maps{display:grid;grid-template-columns:repeat(auto-fill,minmax(min(100%,300px),1fr));gap:10px 28px}"
    ".maps svg{min-width:0;max-width:340px}\n"
    ".cards{display:grid;grid-template-columns:repeat(auto-fill,minmax(min(100%,430px),1fr));gap:30px 28px;margin:16px 0}\n"
    ".card{border-top:3px solid var(--teal);padding-top:8px;min-width:0}\n"
    ".card.excluded{border-color:var(--amber)}.card.unreadable{border-color:var(--red)}\n"
    ".card h3{margin:0 0 6px;overflow-wrap:anywhere;font-size:14.5px}.card img{display:block;width:100%;height:auto}\n"
    ".blank{background:var(--sheet);color:var(--soft);padding:46px 16px;text-align:center;font-size:14px}\n"
    ".facts{display:grid;grid-template-columns:minmax(0,1fr) auto;gap:14px;align-items:start;margin-top:8px}\n"
    ".facts figure{margin:0}.facts img{width:auto;max-width:100%}.facts figcaption{font-size:12.5px}\n"
    ".card dl{display:grid;grid-template-columns:auto 1fr;gap:1px 12px;margin:0;font-size:14px;"
    "font-variant-numeric:tabular-nums}\n"
    "dt{color:var(--soft)}dd{margin:0;overflow-wrap:anywhere}.reason{margin:6px 0 0;font-size:14px}\n"
    ".flag{white-space:nowrap;border-bottom:1px dotted var(--soft)}\n"
    ".key{display:flex;flex-wrap:wrap;gap:4px 20px;font-size:13.5px;color:var(--soft);padding:0;list-style:none;margin:6px 0}\n"
    ".key .good{color:var(--teal)}.key .open{color:var(--amber)}.key .bad{color:var(--red)}\n"
    ".caution{border:2px solid var(--red);padding:4px 18px 10px;margin-top:44px}.caution h2{border:0;margin:6px 0 0;padding:0}\n"
    ".inputs dl{display:grid;grid-template-columns:minmax(90px,auto) 1fr;gap:2px 16px;margin:4px 0;font-size:14px}\n"
    ".inputs td{overflow-wrap:anywhere;min-width:80px}footer{padding:40px 24px 50px;color:var(--soft);font-size:13.5px}\n";
static const char narrow_and_print[] =
    "@media (max-width:560px){header,main,footer{padding-left:14px;padding-right:14px}h1{font-size:24px}body{font-size:15px}"
    ".headline{grid-template-columns:1fr 1fr}th,td{padding-right:9px}tbody.sample td:first-child{padding-left:6px}.facts{grid-template-columns:1fr}}\n"
    "@media print{:root{--paper:#fff;--sheet:#fff;--ink:#000;--soft:#333;--rule:#bbb;--blue:#124f8a;--teal:#005a52;"
    "--amber:#7a4400;--red:#8f1f12;--teal-bg:#fff;--amber-bg:#fff;--red-bg:#fff;--grey-bg:#fff}\n"
    "body{font-size:10pt}header,main,footer{max-width:none;padding:0}nav{display:none}.badge{border:1px solid}\n"
    "figure,.card,tbody.sample,.caution{break-inside:avoid}h2,h3{break-after:avoid}.scroll{overflow:visible}\n"
    "svg{min-width:0}a{color:inherit;text-decoration:none}}\n";

const char *const page_style_parts[] = { colours, frame, headline, tables, pictures, narrow_and_print, NULL };

const char page_script[] =
    "document.querySelectorAll('table.sort').forEach(function(t){t.querySelectorAll('thead th').forEach(function(h,i){\n"
    "var b=document.createElement('button');b.type='button';while(h.firstChild)b.appendChild(h.firstChild);h.appendChild(b);\n"
    "b.addEventListener('click',function(){var up=h.getAttribute('aria-sort')!=='ascending',body=t.tBodies[0];\n"
    "t.querySelectorAll('thead th').forEach(function(o){o.removeAttribute('aria-sort')});\n"
    "h.setAttribute('aria-sort',up?'ascending':'descending');\n"
    "var key=function(r){var s=r.cells[i].textContent.trim(),v=parseFloat(s);return isNaN(v)?s:v};\n"
    "Array.from(body.rows).sort(function(p,q){var a=key(p),c=key(q),d=typeof a===typeof c?(a<c?-1:a>c?1:0):typeof "
    "a==='number'?-1:1;\n"
    "return up?d:-d}).forEach(function(r){body.appendChild(r)})})})});\n";
