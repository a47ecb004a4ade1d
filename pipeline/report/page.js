// The script of report.html: sorts and filters tables, copies them, shows and hides what is drawn on a micrograph, and draws the
// charts anew so that they can be asked point by point. Everything it adds it makes itself, so that a page without scripts shows
// no dead button; the numbers of a chart are those of the table behind it, cell by cell.
'use strict';
(() => {
  const all = (selector, root) => Array.from((root || document).querySelectorAll(selector));
  const make = (tag, properties, parent) => {
    const e = Object.assign(document.createElement(tag), properties);
    if (parent) parent.appendChild(e);
    return e;
  };
  const button = (text, action, parent, label) => {
    const b = make('button', { type: 'button', className: 'copy', textContent: text, onclick: () => action(b) }, parent);
    if (label) b.setAttribute('aria-label', label);
    return b;
  };
  const saying = (b, text) => {
    const before = b.dataset.text || (b.dataset.text = b.textContent);
    b.textContent = text;
    setTimeout(() => { b.textContent = before; }, 2000);
  };

  // ---- tables: sorting by the number a cell begins with, else by its text ----
  const key = (row, i) => {
    const cell = row.cells[i], data = cell && cell.querySelector('data'), text = data ? data.value : cell ? cell.textContent.trim() : '';
    const number = parseFloat(text);
    return Number.isNaN(number) ? text : number;
  };
  const order = (a, b) => (typeof a !== typeof b ? (typeof a === 'number' ? -1 : 1) : a < b ? -1 : a > b ? 1 : 0);
  const sortable = (table) => all('thead th', table).forEach((head, i) => {
    const b = make('button', { type: 'button' });
    b.append(...head.childNodes);
    head.appendChild(b);
    b.onclick = () => {
      const up = head.getAttribute('aria-sort') !== 'ascending', body = table.tBodies[0];
      all('thead th', table).forEach((h) => h.removeAttribute('aria-sort'));
      head.setAttribute('aria-sort', up ? 'ascending' : 'descending');
      body.append(...Array.from(body.rows).sort((p, q) => (up ? 1 : -1) * order(key(p, i), key(q, i))));
    };
  });
  const filterable = (table) => {
    const box = make('div', { className: 'tools' }), label = make('label', { textContent: 'Show only rows with ' }, box);
    const field = make('input', { type: 'search' }, label), said = make('span', {}, box);
    said.setAttribute('role', 'status');
    table.parentNode.before(box);
    field.oninput = () => {
      const words = field.value.toLowerCase().split(/\s+/), rows = Array.from(table.tBodies[0].rows);
      rows.forEach((r) => { const text = r.textContent.toLowerCase(); r.hidden = !words.every((w) => text.includes(w)); });
      said.textContent = `${rows.filter((r) => !r.hidden).length} of ${rows.length} samples shown`;
    };
  };

  // ---- copying a table as CSV ----
  const quoted = (text) => {
    const s = text.replace(/\s+/g, ' ').trim();
    return /[",]/.test(s) ? `"${s.replace(/"/g, '""')}"` : s;
  };
  const whole = (data) => (data.className === 'percent' ? String(Number((100 * Number(data.value)).toPrecision(12))) : data.value);
  const cellText = (cell) => { // all digits, not those left by rounding
    const copy = cell.cloneNode(true);
    all('data', copy).forEach((data) => { data.textContent = whole(data); });
    return copy.textContent;
  };
  const csv = (table) => Array.from(table.rows).map((r) => Array.from(r.cells).map((c) => quoted(cellText(c))).join(',')).join('\n') + '\n';
  const copyByHand = (text) => {
    const area = make('textarea', { value: text }, document.body);
    area.select();
    const ok = document.execCommand('copy');
    area.remove();
    return ok;
  };
  const copyTable = (table, b) => {
    const text = csv(table), done = (ok) => saying(b, ok ? 'Copied' : 'Could not copy');
    if (navigator.clipboard && window.isSecureContext) navigator.clipboard.writeText(text).then(() => done(true), () => done(copyByHand(text)));
    else done(copyByHand(text));
  };

  // ---- charts ----
  const colour = (name) => getComputedStyle(document.documentElement).getPropertyValue('--' + name).trim();
  const TONES = ['blue', 'amber', 'grey', 'teal', 'violet'];
  const MARKS = [['circle', 'teal'], ['rectRot', 'amber'], ['triangle', 'red'], ['rect', 'soft']]; // in the order of spec.words
  const DASHES = { dashed: [8, 4], dotted: [2, 4] };
  const faded = (hex, alpha) => hex + Math.round(255 * alpha).toString(16).padStart(2, '0'); // the style sheet has #rrggbb
  const parted = (label) => label.match(/^(.*?)(?: \(([^()]*)\))?$/).slice(1); // "spacing (nm)" -> spacing, nm

  // The points of one series from its tbody; `text` keeps the cells, so that a tooltip says what the table says.
  const pointsOf = (body, columns, names) => Array.from(body.rows).map((row) => {
    const text = {}, point = { text };
    columns.forEach((c, i) => { text[c] = row.cells[i].textContent.trim(); });
    for (const c of ['x', 'y', 'lo', 'hi']) point[c] = text[c] === undefined || text[c] === '' ? null : Number(text[c]);
    if (names) point.x = Number(row.dataset.x);
    return point;
  });
  const seriesOf = (spec, table) => {
    const shared = spec.first ? document.getElementById(spec.shared) : null;
    return spec.series.map((s, k) => {
      const own = k >= spec.first, body = own ? table.tBodies[k - spec.first] : shared && shared.tBodies[k];
      const columns = own ? spec.columns : ['series', 'x', 'y'];
      return Object.assign({ points: body ? pointsOf(body, columns, spec.names) : [] }, s);
    });
  };

  const lineSet = (s, spec) => {
    const tone = colour(TONES[s.tone]), steps = s.style === 'steps';
    let points = s.points;
    if (steps && points.length > 1) { // the outline begins and ends on the axis
      const w = points[1].x - points[0].x, last = points[points.length - 1];
      points = [{ x: points[0].x - w, y: 0 }, ...points, { x: last.x + w, y: 0 }];
    }
    return { label: s.label || parted(spec.y)[0], unlisted: s.unlisted, data: points, borderColor: tone, borderDash: DASHES[s.style] || [], borderWidth: s.style === 'line' ? 2.2 : 1.6,
      stepped: steps ? 'middle' : false, fill: steps ? 'origin' : false, backgroundColor: faded(tone, 0.2), pointRadius: 0, pointHitRadius: 12,
      pointHoverRadius: 4, pointHoverBackgroundColor: tone, order: 1 };
  };
  const pointSet = (s, spec) => {
    const mark = s.points.map((p) => MARKS[(spec.words || []).indexOf(p.text.verdict)] || ['circle', TONES[s.tone]]), colours = mark.map((m) => colour(m[1]));
    return { label: s.label || parted(spec.y)[0], data: s.points, showLine: false, pointStyle: mark.map((m) => m[0]), pointRadius: 6, pointHoverRadius: 8,
      pointBackgroundColor: colours, pointBorderColor: colour('paper'), borderColor: colours[0] || colour('teal'),
      backgroundColor: colours[0] || colour('teal'), bars: true, order: 0 };
  };
  const bandSets = (s, spec) => ['lo', 'hi'].map((end) => ({ label: '', aside: true, pointRadius: 0, pointHitRadius: 0, borderWidth: 0, order: 2,
    fill: end === 'hi' ? '-1' : false, backgroundColor: faded(colour(TONES[s.tone]), 0.2),
    data: s.points.map((p) => ({ x: p.x, y: p[end] !== null && spec.log ? Math.max(p[end], spec.lo / 10) : p[end] })) }));
  const setsOf = (series, spec) => series.flatMap((s) => {
    if (s.style === 'points') return [pointSet(s, spec)];
    const banded = s.style !== 'steps' && s.points.some((p) => p.lo !== null && p.hi !== null);
    return [...(banded ? bandSets(s, spec) : []), lineSet(s, spec)];
  });

  const line = (c, x0, y0, x1, y1) => { c.beginPath(); c.moveTo(x0, y0); c.lineTo(x1, y1); c.stroke(); };
  const targetSpan = (chart, spec) => {
    const area = chart.chartArea, at = (v, open) => (v === undefined ? open : Math.min(Math.max(chart.scales.y.getPixelForValue(v), area.top), area.bottom));
    return spec.targetLo === undefined && spec.targetHi === undefined ? [] : [at(spec.targetHi, area.top), at(spec.targetLo, area.bottom)];
  };
  // What Chart.js has no type for: the ground, the target, bars of an interval, dashed lines from bottom to top.
  const furniture = (spec) => ({
    id: 'furniture',
    beforeDraw(chart) {
      const c = chart.ctx, area = chart.chartArea, [top, bottom] = targetSpan(chart, spec);
      c.save();
      c.fillStyle = colour('paper');
      c.fillRect(0, 0, chart.width, chart.height);
      c.fillStyle = faded(colour('teal'), 0.13);
      if (top !== undefined) c.fillRect(area.left, top, area.width, bottom - top);
      c.restore();
    },
    beforeDatasetsDraw(chart) {
      const c = chart.ctx, area = chart.chartArea, { x, y } = chart.scales, span = targetSpan(chart, spec);
      c.save();
      c.beginPath();
      c.rect(area.left, area.top, area.width, area.height);
      c.clip();
      c.strokeStyle = colour('teal');
      c.setLineDash([7, 4]);
      [spec.targetHi, spec.targetLo].forEach((v, k) => { if (v !== undefined) line(c, area.left, span[k], area.right, span[k]); });
      c.setLineDash([]);
      c.strokeStyle = colour('ink');
      c.lineWidth = 1.4;
      chart.data.datasets.filter((d) => d.bars).forEach((d) => d.data.forEach((p) => {
        if (typeof p.lo !== 'number' || typeof p.hi !== 'number') return;
        const at = x.getPixelForValue(p.x), top = y.getPixelForValue(p.hi), bottom = y.getPixelForValue(p.lo);
        line(c, at, top, at, bottom);
        line(c, at - 4, top, at + 4, top);
        line(c, at - 4, bottom, at + 4, bottom);
      }));
      c.setLineDash([8, 4]);
      (spec.rules || []).forEach((r) => {
        const at = x.getPixelForValue(r.at);
        c.strokeStyle = c.fillStyle = colour(TONES[r.tone]);
        line(c, at, area.top, at, area.bottom);
        c.font = '11px system-ui,sans-serif';
        if (r.label) c.fillText(r.label, at + 3, area.top + 9);
      });
      c.restore();
    },
  });

  // "600 nm: reflectance 1.23 % (0.9 to 3.1)": the digits of the table, the units of the axes.
  const sentence = (spec, set, p) => {
    const [quantity, unit] = parted(spec.y), t = p.text || {};
    const range = t.lo !== undefined && t.lo !== '' ? ` (${t.lo} to ${t.hi}${unit ? ' ' + unit : ''})` : '';
    const at = t.name ? `${parted(spec.x).join(' ').trim()} ${t.x}; ` : '';
    return `${at}${t.name ? quantity : set.label || quantity}: ${t.y}${unit ? ' ' + unit : ''}${range}${t.verdict ? ', ' + t.verdict : ''}`;
  };
  const place = (spec, p) => {
    if (spec.names) return spec.names[p.x];
    if (p.text && p.text.name) return p.text.name;
    const [quantity, unit] = parted(spec.x);
    return `${quantity} ${p.text ? p.text.x : p.x}${unit ? ' ' + unit : ''}`;
  };

  const scalesOf = (spec) => {
    const plain = (v) => String(Number(v.toPrecision(6)));
    const ticks = { color: colour('soft'), maxRotation: 0, includeBounds: false, callback: plain }, grid = { color: colour('rule'), borderColor: colour('soft') };
    const title = (text) => ({ display: true, text, color: colour('ink') });
    const decade = (v) => { const lead = Number(v.toPrecision(1)) / 10 ** Math.floor(Math.log10(v) + 1e-9); return Math.abs(lead - 1) < 1e-6; };
    const x = spec.names ? { type: 'category', labels: spec.names, offset: true } : { type: 'linear', min: spec.xLo, max: spec.xHi };
    Object.assign(x, { title: title(spec.x), grid: Object.assign({ drawOnChartArea: false }, grid),
      ticks: Object.assign({ autoSkipPadding: 14 }, ticks) });
    if (spec.names) x.ticks.callback = function short(v) { const s = this.getLabelForValue(v); return s.length > 18 ? s.slice(0, 17) + '\u2026' : s; };
    const y = { type: spec.log ? 'logarithmic' : 'linear', title: title(spec.y), grid, ticks, min: spec.lo, max: spec.hi, grace: spec.hi === undefined ? '6%' : 0,
      beginAtZero: spec.zero };
    if (spec.log) y.afterBuildTicks = (axis) => { axis.ticks = axis.ticks.filter((t) => decade(t.value)); };
    else {
      y.suggestedMin = Math.min(...[spec.targetLo, spec.barLo].filter((v) => v !== undefined));
      y.suggestedMax = Math.max(...[spec.targetHi, spec.barHi].filter((v) => v !== undefined));
      if (!Number.isFinite(y.suggestedMin)) delete y.suggestedMin;
      if (!Number.isFinite(y.suggestedMax)) delete y.suggestedMax;
    }
    return { x, y };
  };

  const legendOf = (chart) => Chart.defaults.plugins.legend.labels.generateLabels(chart).filter((item) => item.text !== '' && !chart.data.datasets[item.datasetIndex].unlisted).map((item) =>
    Object.assign(item, { pointStyle: chart.data.datasets[item.datasetIndex].bars ? 'circle' : 'line', lineWidth: 2.2 }));

  const configure = (spec, table) => {
    const series = seriesOf(spec, table), ends = series.flatMap((s) => (s.style === 'points' ? s.points : []));
    const of = (end) => ends.map((p) => p[end]).filter((v) => v !== null && v !== undefined);
    const bins = series.find((s) => s.style === 'steps' && s.points.length > 1), places = series.flatMap((s) => s.points.map((p) => p.x));
    const half = bins ? 0.5 * (bins.points[1].x - bins.points[0].x) : 0; // the outermost bins end half a step beyond their middles
    if (!spec.names) Object.assign(spec, { xLo: Math.min(...places) - half, xHi: Math.max(...places) + half });
    if (of('lo').length) Object.assign(spec, { barLo: Math.min(...of('lo')), barHi: Math.max(...of('hi')) });
    const points = series.some((s) => s.style === 'points');
    return {
      type: 'line',
      data: { datasets: setsOf(series, spec) },
      plugins: [furniture(spec)],
      options: {
        parsing: false, animation: false, responsive: true, maintainAspectRatio: false, devicePixelRatio: Math.max(2, window.devicePixelRatio),
        interaction: { mode: points ? 'nearest' : 'index', axis: 'x', intersect: false },
        scales: scalesOf(spec),
        plugins: {
          title: { display: true, text: spec.title, align: 'start', color: colour('ink'), font: { size: 14, weight: '600' }, padding: { top: 2, bottom: 8 } },
          legend: { display: spec.legend && series.some((s) => s.label), align: 'start',
            labels: { color: colour('soft'), usePointStyle: true, boxWidth: 14, boxHeight: 10, generateLabels: legendOf } },
          tooltip: { filter: (item) => !item.dataset.aside && Boolean(item.raw.text),
            callbacks: { title: (items) => (items.length ? place(spec, items[0].raw) : ''), label: (item) => sentence(spec, item.dataset, item.raw) } },
          filler: { propagate: false },
        },
      },
    };
  };

  // Arrow keys walk the points of a chart; what is found there is said as text.
  const walk = (chart, spec, said) => {
    const sets = chart.data.datasets.map((d, i) => (d.aside ? -1 : i)).filter((i) => i >= 0);
    let set = sets[sets.length - 1], index = -1;
    chart.canvas.addEventListener('keydown', (event) => {
      const step = { ArrowRight: 1, ArrowLeft: -1, Home: -1e9, End: 1e9 }[event.key], turn = { ArrowUp: -1, ArrowDown: 1 }[event.key];
      if (event.key === 'Escape') index = -1;
      else if (step === undefined && turn === undefined) return;
      event.preventDefault();
      if (turn) set = sets[(sets.indexOf(set) + turn + sets.length) % sets.length];
      const points = chart.data.datasets[set].data;
      if (step) index += step;
      index = event.key === 'Escape' ? -1 : Math.min(Math.max(index, 0), points.length - 1);
      while (index >= 0 && index < points.length - 1 && !points[index].text) index += step === -1 ? -1 : 1;
      const active = index < 0 ? [] : [{ datasetIndex: set, index }];
      chart.setActiveElements(active);
      chart.tooltip.setActiveElements(active, { x: 0, y: 0 });
      chart.update('none');
      said.textContent = index < 0 || !points[index].text ? '' : `${place(spec, points[index])}: ${sentence(spec, chart.data.datasets[set], points[index])}`;
    });
  };

  const save = (canvas, name) => canvas.toBlob((blob) => {
    const a = make('a', { href: URL.createObjectURL(blob), download: name.replace(/[^A-Za-z0-9._-]+/g, '-').slice(0, 80) + '.png' });
    a.click();
    setTimeout(() => URL.revokeObjectURL(a.href), 1000);
  });
  // A static drawing as a picture: twice its size, on the paper of the page; its colours are those of the light scheme.
  const saveDrawing = (svg, name) => {
    const box = svg.viewBox.baseVal, copy = svg.cloneNode(true), image = new Image();
    copy.setAttribute('width', 2 * box.width);
    copy.setAttribute('height', 2 * box.height);
    image.onload = () => {
      const canvas = make('canvas', { width: 2 * box.width, height: 2 * box.height }), c = canvas.getContext('2d');
      c.fillStyle = '#fff';
      c.fillRect(0, 0, canvas.width, canvas.height);
      c.drawImage(image, 0, 0);
      save(canvas, name);
    };
    image.src = 'data:image/svg+xml;charset=utf-8,' + encodeURIComponent(new XMLSerializer().serializeToString(copy));
  };

  const chartOf = (box) => {
    const spec = JSON.parse(box.dataset.plot), figure = box.parentNode, svg = box.querySelector('svg'), table = figure.querySelector('details.data table');
    const size = svg.viewBox.baseVal, frame = make('div', { className: 'live' });
    const said = make('span', { className: 'said' });
    said.setAttribute('role', 'status');
    let chart = null;
    return {
      box,
      show() {
        if (chart) return;
        frame.style.aspectRatio = figure.classList.contains('wide') ? '' : `${size.width} / ${size.height}`;
        const canvas = make('canvas', { tabIndex: 0 }, frame);
        canvas.setAttribute('role', 'img');
        canvas.setAttribute('aria-label', `${svg.getAttribute('aria-label')}. Arrow keys walk its points; the data stand in the table below.`);
        box.append(frame, said);
        box.classList.add('drawn');
        chart = new Chart(canvas, configure(spec, table));
        walk(chart, spec, said);
      },
      hide() { // a canvas far from sight would hold memory
        if (!chart || frame.contains(document.activeElement)) return;
        chart.destroy();
        chart = null;
        frame.replaceChildren();
        frame.remove();
        box.classList.remove('drawn');
      },
      redraw() { if (chart) { this.hide(); this.show(); } },
      save() { this.show(); save(chart.canvas, spec.title + ' ' + parted(spec.y)[0]); },
    };
  };

  const startCharts = () => {
    const charts = new Map(all('.chart[data-plot]').map((box) => [box, chartOf(box)]));
    const seen = new IntersectionObserver((entries) => entries.forEach((e) => {
      const chart = charts.get(e.target);
      if (e.isIntersecting) chart.show();
      else chart.hide();
    }), { rootMargin: '500px 0px' });
    charts.forEach((chart, box) => seen.observe(box));
    matchMedia('(prefers-color-scheme: dark)').addEventListener('change', () => charts.forEach((chart) => chart.redraw()));
    return charts;
  };

  // ---- what is drawn on the micrographs ----
  const layered = (section) => {
    const bar = make('div', { className: 'layers', textContent: 'Show on the pictures: ' });
    [['centres', 'centres'], ['cells', 'cells'], ['frame', 'features at the frame'], ['ring', 'ring of the spacing'], ['strip', 'greyed info strip']].forEach(([name, text]) => {
      if (!section.querySelector('.l-' + name)) return;
      const b = button(text, () => {
        const shown = !section.classList.toggle('no-' + name);
        b.setAttribute('aria-pressed', String(shown));
      }, bar);
      b.setAttribute('aria-pressed', 'true');
    });
    if (bar.children.length) section.querySelector('.cards').before(bar);
  };

  // ---- the page ----
  if (typeof Chart === 'function') Chart.defaults.font.family = getComputedStyle(document.body).fontFamily;
  all('table.sort').forEach(sortable);
  all('table.filter').forEach(filterable);
  all('#micrographs').forEach(layered);
  const charts = typeof Chart === 'function' ? startCharts() : new Map();
  all('table.csv').forEach((table) => {
    const figure = table.closest('figure'), name = figure && table.closest('.scroll').getAttribute('aria-label').replace(/^Data: /, '');
    if (!figure) {
      const b = button('Copy as CSV', () => copyTable(table, b));
      table.parentNode.before(b);
      return;
    }
    const box = figure.querySelector('.chart'), tools = make('div', { className: 'chart-tools' });
    button('PNG', () => (charts.has(box) ? charts.get(box).save() : saveDrawing(figure.querySelector('svg'), name)), tools, `Save as PNG: ${name}`);
    button('CSV', (b) => copyTable(table, b), tools, `Copy as CSV: ${name}`);
    table.closest('details').before(tools);
  });
})();
