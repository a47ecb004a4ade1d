#!/usr/bin/env python3
"""Writes micrographs in every variant of PNG, TIFF and JPEG that a laboratory's folder may hold, instrument blocks and
sidecars in the spellings of different machines, and hostile files; says of each what must come out. The encoders below
are written from the specifications (PNG third edition, TIFF 6.0 with supplements, BigTIFF, ITU-T T.81, RFC 8878), so that
the pixels are known without any decoder. Layouts of private tags: no published standard, as seen in files.
Only Python's standard library is needed.  write.py FOLDER -> files, FOLDER/cases.txt, FOLDER/*.want (float32 planes)
Does not: JPEG beyond blocks of one level each, LZW beyond literal codes."""
import base64, json, os, random, struct, sys, zlib

OUT = sys.argv[1]
random.seed(20240630)
NX, NY = 80, 64
cases = []


def plane(top, nx=NX, ny=NY, low=0):
    """Random levels low..top, both ends present."""
    v = [[random.randint(low, top) for _ in range(nx)] for _ in range(ny)]
    v[0][0], v[0][1] = low, top
    return v


def case(name, data, verdict="ok", px="-", strip="-", want=None, tol=1e-6):
    """px: nm, 'none', or '-' for whatever; want: rows of floats 0..1 or None."""
    if data is not None:
        with open(os.path.join(OUT, name), "wb") as f:
            f.write(data)
    if want is not None:
        with open(os.path.join(OUT, name + ".want"), "wb") as f:
            f.write(struct.pack("<II", len(want[0]), len(want)))
            for row in want:
                f.write(struct.pack("<%df" % len(row), *row))
    cases.append("\t".join([name, verdict, str(px), str(strip), "%g" % tol if want is not None else "-"]))


def beside(name, data):
    with open(os.path.join(OUT, name), "wb") as f:
        f.write(data)


def levels(v, top):
    return [[x / top for x in row] for row in v]


def own_range(v):
    lo, hi = min(map(min, v)), max(map(max, v))
    return [[(x - lo) / (hi - lo) for x in row] for row in v]


def luma(r, g, b):
    """Rec. ITU-R BT.709-6, item 3.2."""
    return r if r == g == b else 0.2126 * r + 0.7152 * g + 0.0722 * b


# ---- PNG ----

def chunk(kind, data):
    return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))


def pack_bits(row, bits):
    out, acc, have = bytearray(), 0, 0
    for v in row:
        acc, have = acc << bits | v, have + bits
        while have >= 8:
            have -= 8
            out.append(acc >> have & 255)
        acc &= (1 << have) - 1
    if have:
        out.append(acc << 8 - have & 255)
    return bytes(out)


def png_filter(kind, row, prior, step):
    def at(b, i):
        return b[i] if i >= 0 else 0

    def guess(i):
        a, b, c = at(row, i - step), prior[i], at(prior, i - step)
        if kind == 4:
            p = a + b - c
            pa, pb, pc = abs(p - a), abs(p - b), abs(p - c)
            return a if pa <= pb and pa <= pc else b if pb <= pc else c
        return (0, a, b, (a + b) // 2)[kind]
    return bytes([kind]) + bytes((row[i] - guess(i)) & 255 for i in range(len(row)))


ADAM7 = [(0, 0, 8, 8), (4, 0, 8, 8), (0, 4, 4, 8), (2, 0, 4, 4), (0, 2, 2, 4), (1, 0, 2, 2), (0, 1, 1, 2)]


def png_scan(samples, depth, channels):
    rows = [pack_bits([s for pixel in row for s in pixel], depth) for row in samples]
    prior, out, step = bytes(len(rows[0])), b"", max(1, depth * channels // 8)
    for y, row in enumerate(rows):
        out += png_filter(y % 5, row, prior, step)
        prior = row
    return out


def png(samples, depth, kind, interlace=0, extra=b"", late=b""):
    """samples[y][x] is a tuple of channels."""
    ny, nx, channels = len(samples), len(samples[0]), len(samples[0][0])
    if interlace:
        raw = b""
        for x0, y0, dx, dy in ADAM7:
            part = [row[x0::dx] for row in samples[y0::dy]]
            if part and part[0]:
                raw += png_scan(part, depth, channels)
    else:
        raw = png_scan(samples, depth, channels)
    z = zlib.compress(raw)
    half = len(z) // 2
    return (b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", struct.pack(">IIBBBBB", nx, ny, depth, kind, 0, 0, interlace)) + extra +
            chunk(b"IDAT", z[:half]) + chunk(b"IDAT", z[half:]) + late + chunk(b"IEND", b""))


def grey_png(extra=b"", late=b""):
    return png([[(v,) for v in row] for row in plane(255)], 8, 0, 0, extra, late)


def png_variants():
    for interlace in (0, 1):
        for depth in (1, 2, 4, 8, 16):
            top = (1 << depth) - 1
            v = plane(top, 83, 61)
            want = levels(v, top)
            case("png_grey%d_i%d.png" % (depth, interlace), png([[(x,) for x in r] for r in v], depth, 0, interlace), want=want)
            case("png_grey%d_trns_i%d.png" % (depth, interlace),
                 png([[(x,) for x in r] for r in v], depth, 0, interlace, chunk(b"tRNS", struct.pack(">H", top))), want=want)
            if depth >= 8:
                case("png_greya%d_i%d.png" % (depth, interlace), png([[(x, (7 * x) % top) for x in r] for r in v], depth, 4, interlace), want=want)
                w = [[(x, (3 * x + 11) % (top + 1), top - x) for x in r] for r in v]
                coloured = [[luma(a / top, b / top, c / top) for a, b, c in r] for r in w]
                case("png_rgb%d_i%d.png" % (depth, interlace), png(w, depth, 2, interlace), want=coloured)
                case("png_rgb%d_equal_i%d.png" % (depth, interlace), png([[(x, x, x) for x in r] for r in v], depth, 2, interlace), want=want)
                case("png_rgba%d_i%d.png" % (depth, interlace), png([[p + (top // 3,) for p in r] for r in w], depth, 6, interlace), want=coloured)
            if depth <= 8:
                colours = [(255 * i // top, 255 * i // top, (255 * i // top) ^ (i % 3 == 2)) for i in range(top + 1)]
                extra = chunk(b"PLTE", bytes(c for p in colours for c in p)) + chunk(b"tRNS", b"\x80\x40")
                case("png_palette%d_i%d.png" % (depth, interlace), png([[(x,) for x in r] for r in v], depth, 3, interlace, extra),
                     want=[[luma(*[c / 255 for c in colours[x]]) for x in r] for r in v])


def png_scales():
    def text(key, value):
        return chunk(b"tEXt", key + b"\0" + value)

    def itxt(key, value):
        return chunk(b"iTXt", key + b"\0\0\0\0\0" + value)
    ome = '<OME><Image><Pixels SizeX="%d" PhysicalSizeX="0.005"/></Image></OME>' % NX
    for name, extra, px in [
            ("phys", chunk(b"pHYs", struct.pack(">IIB", 200000000, 200000000, 1)), 5),
            ("phys_screen", chunk(b"pHYs", struct.pack(">IIB", 3780, 3780, 1)), "none"),
            ("phys_ratio", chunk(b"pHYs", struct.pack(">IIB", 200000000, 200000000, 0)), "none"),
            ("phys_zero", chunk(b"pHYs", struct.pack(">IIB", 0, 0, 1)), "none"),
            ("scal", chunk(b"sCAL", b"\x015e-9\x005e-9"), 5), ("scal_radian", chunk(b"sCAL", b"\x025e-9\x005e-9"), "none"),
            ("scal_over_phys", chunk(b"pHYs", struct.pack(">IIB", 100000000, 100000000, 1)) + chunk(b"sCAL", b"\x014.9e-009\x004.9e-009"), 4.9),
            ("text", text(b"PixelSize", b"0,0051 \xb5m"), 5.1), ("itxt", itxt(b"PixelSize", "0.005 µm".encode()), 5),
            ("itxt_greek", itxt(b"PixelSize", "0.005 \u03bcm".encode()), 5), ("text_unitless", text(b"PixelSize", b"5.1"), "none"),
            ("ztxt", chunk(b"zTXt", b"Description\0\0" + zlib.compress(b"pixel size = 558.2 pm\r\n")), 0.5582),
            ("json", text(b"Comment", b'{"pixel_size": {"x": 5e-9, "y": 5e-9}}'), 5), ("ome", itxt(b"Comment", ome.encode()), 5),
            ("magnification", text(b"Comment", b"Magnification: 20000"), "none"), ("mega", text(b"PixelSize", b"5 Mm"), "none"),
            ("group", text(b"PixelSize", b"1,234.5 nm"), "none")]:
        case("pngpx_%s.png" % name, grey_png(extra), px=px)
    case("pngpx_late_text.png", grey_png(b"", text(b"px_nm", b"7.25")), px=7.25)
    case("pngpx_exif.png", grey_png(chunk(b"eXIf", exif(">", 3, 2000000)[10:])), px=5)
    case("pngpx_exif_screen.png", grey_png(chunk(b"eXIf", exif("<", 2, 96)[10:])), px="none")
    bad = chunk(b"pHYs", struct.pack(">IIB", 200000000, 200000000, 1))
    case("pngpx_bad_crc.png", grey_png(bad[:-1] + bytes([bad[-1] ^ 1])))


# ---- TIFF ----

SIZES = {1: 1, 2: 1, 3: 2, 4: 4, 5: 8, 7: 1, 11: 4, 12: 8, 16: 8}
LETTERS = {3: "H", 4: "I", 5: "I", 11: "f", 12: "d", 16: "Q"}


def tiff(pages, order="<", big=False):
    """pages: ({tag: (type, values)}, pieces, offsets tag, counts tag), the pieces already encoded."""
    o, word = order, 16 if big else 4
    out = bytearray((b"II" if o == "<" else b"MM") + (struct.pack(o + "HHHQ", 43, 8, 0, 0) if big else struct.pack(o + "HI", 42, 0)))
    link, link_letter = (8, "Q") if big else (4, "I")
    for tags, pieces, offsets_tag, counts_tag in pages:
        offsets = []
        for piece in pieces:
            out += bytes(len(out) % 2)
            offsets.append(len(out))
            out += piece
        entries = dict(tags)
        entries[offsets_tag] = (word, offsets)
        entries[counts_tag] = (word, [len(p) for p in pieces])
        field, room = b"", 8 if big else 4
        for tag in sorted(entries):
            kind, values = entries[tag]
            if isinstance(values, bytes):
                raw, count = values, len(values) // SIZES[kind]
            else:
                raw = struct.pack(o + "%d%s" % (len(values), LETTERS[kind]), *values)
                count = len(raw) // SIZES[kind]
            if len(raw) > room:
                out += bytes(len(out) % 2)
                place = len(out)
                out += raw
                raw = struct.pack(o + ("Q" if big else "I"), place)
            field += struct.pack(o + ("HHQ" if big else "HHI"), tag, kind, count) + raw.ljust(room, b"\0")
        out += bytes(len(out) % 2)
        struct.pack_into(o + link_letter, out, link, len(out))
        out += struct.pack(o + ("Q" if big else "H"), len(entries)) + field
        link = len(out)
        out += bytes(8 if big else 4)
    return bytes(out)


def lzw(data):
    """Literal codes only, cleared before they grow beyond 9 bits."""
    codes = []
    for i in range(0, len(data), 250):
        codes += [256] + list(data[i:i + 250])
    return pack_bits(codes + [257], 9)


def packbits(data):
    out = b""
    for i in range(0, len(data), 100):
        part = data[i:i + 100]
        out += bytes([len(part) - 1]) + part
    return out


def zstd(data):
    """One frame of raw blocks, RFC 8878 section 3.1.1."""
    out = struct.pack("<IBI", 0xFD2FB528, 0xA0, len(data))
    return out + struct.pack("<I", len(data) << 3 | 1)[:3] + data


CODECS = {1: bytes, 5: lzw, 8: zlib.compress, 32946: zlib.compress, 32773: packbits, 50000: zstd}


def raw_row(row, kind, order):
    if isinstance(kind, int):
        return pack_bits(row, kind) if kind not in (16, 32) else struct.pack(order + "%d%s" % (len(row), "H" if kind == 16 else "I"), *row)
    return struct.pack(order + "%d%s" % (len(row), kind), *row)


def difference(row, bits):
    return [row[0] % (1 << bits)] + [(row[i] - row[i - 1]) % (1 << bits) for i in range(1, len(row))]


BITS = {"b": 8, "h": 16, "i": 32, "q": 64, "Q": 64, "e": 16, "f": 32, "d": 64}


def page(v, kind, order="<", compression=1, rows=None, tile=None, predictor=1, photometric=1, samples=1, planar=1, more=None):
    """v: rows of samples (interleaved when chunky); kind: bits of unsigned samples or a struct letter. planar 2: v is a list of planes."""
    planes = v if planar == 2 else [v]
    ny, nx = len(planes[0]), len(planes[0][0]) // (1 if planar == 2 else samples)
    bits = kind if isinstance(kind, int) else BITS[kind]
    per, step = rows or ny, 1 if planar == 2 else samples
    pieces = []

    def encode(block):
        coded = b""
        for row in block:
            coded += raw_row(difference(row, bits), bits, order) if predictor == 2 else raw_row(row, kind, order)
        return CODECS[compression](coded)
    for p in planes:
        if tile:
            for y in range(0, ny, tile):
                for x in range(0, nx, tile):
                    block = [r[x * step:(x + tile) * step] for r in p[y:y + tile]]
                    block = [r + [0] * (tile * step - len(r)) for r in block]
                    pieces.append(encode(block + [[0] * (tile * step)] * (tile - len(block))))
        else:
            pieces += [encode(p[y:y + per]) for y in range(0, ny, per)]
    form = 1 if kind in ("Q",) or isinstance(kind, int) else 3 if kind in "efd" else 2
    tags = {256: (4, [nx]), 257: (4, [ny]), 258: (3, [bits] * samples), 259: (3, [compression]), 262: (3, [photometric]), 277: (3, [samples]),
            284: (3, [planar]), 339: (3, [form] * samples)}
    if predictor > 1:
        tags[317] = (3, [predictor])
    if tile:
        tags.update({322: (4, [tile]), 323: (4, [tile])})
    else:
        tags[278] = (4, [per])
    tags.update(more or {})
    return tags, pieces, 324 if tile else 273, 325 if tile else 279


def float_predicted(v, kind, size, order):
    """Predictor 3 (TIFF technical note 3): bytes of a row sorted by weight, the heaviest first, then differences of bytes."""
    tags, _, offsets, counts = page(v, kind, order)
    raw = b""
    for row in v:
        values = struct.pack(">%d%s" % (len(row), kind), *row)
        planes = b"".join(values[k::size] for k in range(size))
        raw += bytes([planes[0]]) + bytes((planes[i] - planes[i - 1]) & 255 for i in range(1, len(planes)))
    tags.update({259: (3, [8]), 317: (3, [3])})
    return tags, [zlib.compress(raw)], offsets, counts


def tiff_depths():
    for order in "<>":
        for big in (False, True):
            tail = ("le" if order == "<" else "be") + ("_big" if big else "") + ".tif"
            for bits in (1, 2, 4, 8, 12, 16):
                top = (1 << bits) - 1
                v = plane(top)
                case("tif_u%d_%s" % (bits, tail), tiff([page(v, bits, order, rows=7)], order, big), want=levels(v, top))
            for letter, v in [("b", plane(100, low=-128)), ("h", plane(20000, low=-31000)), ("i", plane(2000000000, low=-2000000000)),
                              (32, plane(4000000000)), ("f", [[x / 7 for x in r] for r in plane(9999)]),
                              ("d", [[x / 7 - 200 for x in r] for r in plane(9999)]), ("e", plane(1000))]:
                case("tif_%s_%s" % (letter if letter != 32 else "u32", tail), tiff([page(v, letter, order, rows=9)], order, big),
                     want=own_range(v), tol=3e-6)


def tiff_codecs():
    for order in "<>":
        for compression, name in ((5, "lzw"), (8, "deflate"), (32946, "deflate_old"), (32773, "packbits"), (50000, "zstd")):
            for kind, top in ((8, 255), (16, 65535)):
                for tile in (None, 32):
                    for predictor in (1, 2) if compression in (5, 8) else (1,):
                        v = plane(top)
                        tail = "%s_u%d_%s%s%s.tif" % (name, kind, "le" if order == "<" else "be", "_tiles" if tile else "", "_p2" if predictor == 2 else "")
                        case("tif_" + tail, tiff([page(v, kind, order, compression, None if tile else 10, tile, predictor)], order),
                             "ok" if compression != 50000 else "zstd", want=levels(v, top))
            v = [[x / 7 - 300 for x in r] for r in plane(9999)]
            case("tif_%s_float_%s.tif" % (name, "le" if order == "<" else "be"), tiff([page(v, "f", order, compression, 10)], order),
                 "ok" if compression != 50000 else "zstd", want=own_range(v), tol=3e-6)
        for kind, bits in (("f", 4), ("d", 8)):
            v = [[x / 8 - 300 for x in r] for r in plane(9999)]
            case("tif_float_p3_%s_%s.tif" % (kind, "le" if order == "<" else "be"), tiff([float_predicted(v, kind, bits, order)], order), want=own_range(v), tol=3e-6)
        for kind, low, top in (("h", -30000, 30000), ("i", -2 ** 30, 2 ** 30), (32, 0, 2 ** 32 - 1)):
            v = plane(top, low=low)
            case("tif_p2_%s_%s.tif" % (kind, "le" if order == "<" else "be"), tiff([page(v, kind, order, 8, 10, predictor=2)], order), want=own_range(v), tol=3e-6)
        v = plane(2 ** 24 - 1)
        raw = b"".join(x.to_bytes(3, "little" if order == "<" else "big") for r in v for x in r)
        tags = page(v, "i", order)[0]
        tags.update({258: (3, [24]), 339: (3, [1])})
        case("tif_u24_%s.tif" % ("le" if order == "<" else "be"), tiff([(tags, [raw], 273, 279)], order), want=own_range(v), tol=3e-6)
        v = plane(2 ** 50, low=-2 ** 50)
        case("tif_i64_%s.tif" % ("le" if order == "<" else "be"), tiff([page(v, "q", order, 8, 10)], order), want=own_range(v), tol=3e-6)
    flipped = bytes(int(format(k, "08b")[::-1], 2) for k in range(256))
    for bits in (1, 4, 8, 12):  # tag 266 = 2: the first pixel in the lowest bits
        v = plane((1 << bits) - 1)
        tags, pieces, a, b = page(v, bits, more={266: (3, [2])})
        case("tif_fill_order_%d.tif" % bits, tiff([(tags, [x.translate(flipped) for x in pieces], a, b)]), want=levels(v, (1 << bits) - 1))
    v = plane(255, 83, 61)
    case("tif_odd_tiles.tif", tiff([page(v, 8, ">", 8, None, 16)], ">"), want=levels(v, 255))
    case("tif_one_row_strips.tif", tiff([page(v, 8, ">", 5, 1)], ">"), want=levels(v, 255))
    v = plane(4095)
    for order in "<>":  # a detector of 12 bits in samples of 16, at the low and at the high end
        w = [[x << 4 for x in r] for r in v]
        case("tif_12_in_16_%s.tif" % ("le" if order == "<" else "be"), tiff([page(v, 16, order)], order), want=levels(v, 4095))
        case("tif_12_in_16_high_%s.tif" % ("le" if order == "<" else "be"), tiff([page(w, 16, order)], order), want=levels(v, 4095), tol=1e-4)
    case("tif_u12_deflate.tif", tiff([page(v, 12, "<", 8, 5)]), want=levels(v, 4095))


def tiff_colours():
    v = plane(255)
    for bits in (1, 4, 8, 16):
        w = plane((1 << bits) - 1)
        case("tif_white_is_zero_%d.tif" % bits, tiff([page(w, bits, photometric=0)]), want=[[1 - x / ((1 << bits) - 1) for x in r] for r in w])
    for bits in (1, 2, 4, 8):
        top = (1 << bits) - 1
        w, ramp = plane(top), [255 * i // top for i in range(top + 1)]
        for copy in (0, 1):
            colours = [c << 8 | (c if copy else 0) for c in ramp]
            case("tif_palette%d_%d.tif" % (bits, copy), tiff([page(w, bits, photometric=3, more={320: (3, colours * 3)})]),
                 want=[[ramp[x] / 255 for x in r] for r in w])
    for bits in (8, 16):
        top = (1 << bits) - 1
        r, g, b = plane(top), plane(top), plane(top)
        want = [[luma(*[c / top for c in p]) for p in zip(*rows)] for rows in zip(r, g, b)]
        flat = [[c for p in zip(*rows) for c in p] for rows in zip(r, g, b)]
        for order in "<>":
            end = "%d_%s.tif" % (bits, "le" if order == "<" else "be")
            case("tif_rgb" + end, tiff([page(flat, bits, order, 8, 10, photometric=2, samples=3)], order), want=want)
            case("tif_rgb_planar" + end, tiff([page([r, g, b], bits, order, 1, 10, photometric=2, samples=3, planar=2)], order), want=want)
            case("tif_rgb_planar_tiles" + end, tiff([page([r, g, b], bits, order, 8, None, 32, photometric=2, samples=3, planar=2)], order), want=want)
            four = [[c for p in zip(*rows) for c in p + (top // 2,)] for rows in zip(r, g, b)]
            case("tif_rgba" + end, tiff([page(four, bits, order, 1, 10, photometric=2, samples=4, more={338: (3, [2])})], order), want=want)
    case("tif_greya.tif", tiff([page([[c for x in r for c in (x, 255 - x)] for r in v], 8, samples=2, more={338: (3, [2])})]), want=levels(v, 255))
    case("tif_cmyk.tif", tiff([page([[c for x in r for c in (0, 0, 0, x)] for r in v], 8, photometric=5, samples=4)]),
         want=[[1 - x / 255 for x in r] for r in v], tol=1e-5)
    case("tif_ycbcr.tif", tiff([page([[c for x in r for c in (x, 128, 128)] for r in v], 8, photometric=6, samples=3,
                                     more={530: (3, [1, 1]), 532: (5, [0, 1, 255, 1, 128, 1, 255, 1, 128, 1, 255, 1])})]),
         want=levels(v, 255), tol=0.005)
    luminance = [[v[y][x] for x in range(NX)] for y in range(NY)]
    units = [[c for x in range(0, NX, 2) for c in (luminance[y][x], luminance[y][x + 1], luminance[y + 1][x], luminance[y + 1][x + 1], 128, 128)]
             for y in range(0, NY, 2)]  # two by two luminances, then their common chroma (TIFF 6.0, section 21)
    tags = page(v, 8, photometric=6, samples=1, more={277: (3, [3]), 258: (3, [8, 8, 8]), 339: (3, [1, 1, 1]), 530: (3, [2, 2])})[0]
    case("tif_ycbcr_22.tif", tiff([(tags, [bytes(c for r in units for c in r)], 273, 279)]), want=levels(v, 255), tol=0.005)
    inks = [[c for x in r for c in (x, 255 - x, (5 * x) % 256, x // 3)] for r in v]
    case("tif_cmyk_coloured.tif", tiff([page(inks, 8, photometric=5, samples=4)]),
         want=[[luma(*[1 - c / 255 for c in r[i:i + 3]]) * (1 - r[i + 3] / 255) for i in range(0, len(r), 4)] for r in inks], tol=1e-5)
    case("tif_greya_planar.tif", tiff([page([v, plane(255)], 8, samples=2, planar=2, more={338: (3, [2])})]), want=levels(v, 255))
    case("tif_five_samples.tif", tiff([page([[c for x in r for c in (x, x, x, 9, 7)] for r in v], 8, photometric=2, samples=5, more={338: (3, [0, 0])})]), want=levels(v, 255))
    blocks, stream, want = jpeg_blocks()
    tags = page(blocks, 8)[0]
    tags[259] = (3, [7])
    case("tif_jpeg.tif", tiff([(tags, [stream], 273, 279)]), want=want)


def tiff_pages():
    v, small, mask = plane(255), plane(255, 40, 32), plane(1)
    full, thumb = page(v, 8), page(small, 8, more={254: (4, [1])})
    want = levels(v, 255)
    case("tif_thumb_first.tif", tiff([thumb, full]), want=want)
    case("tif_thumb_last.tif", tiff([full, thumb]), want=want)
    case("tif_three_equal.tif", tiff([full, page(plane(255), 8), page(plane(255), 8)]), want=want)
    case("tif_mask_second.tif", tiff([full, page(mask, 1, photometric=4, more={254: (4, [4])})]), want=want)
    wide = page(plane(255, 200, 160), 8, more={254: (4, [1])})
    case("tif_large_reduced.tif", tiff([wide, full]), want=want)
    case("tif_no_rows_per_strip.tif", tiff([(dict((k, x) for k, x in full[0].items() if k != 278),) + full[1:]]), want=want)
    turn = {1: lambda x, y: (x, y), 2: lambda x, y: (NX - 1 - x, y), 3: lambda x, y: (NX - 1 - x, NY - 1 - y), 4: lambda x, y: (x, NY - 1 - y),
            5: lambda x, y: (y, x), 6: lambda x, y: (y, NY - 1 - x), 7: lambda x, y: (NX - 1 - y, NY - 1 - x), 8: lambda x, y: (NX - 1 - y, x)}
    for k, place in turn.items():  # seen (x, y) <- stored (column, row); TIFF 6.0, tag 274
        nx, ny = (NX, NY) if k < 5 else (NY, NX)
        seen = [[0.0] * nx for _ in range(ny)]
        for y in range(ny):
            for x in range(nx):
                c, r = place(x, y)
                seen[y][x] = v[r][c] / 255
        more = {274: (3, [k]), 282: (5, [2000000, 1]), 283: (5, [2000000, 1]), 296: (3, [3])}
        case("tif_turned%d.tif" % k, tiff([page(v, 8, more=more)]), px=5, want=seen)
        more[283] = (5, [1600000, 1])
        case("tif_turned%d_oblong.tif" % k, tiff([page(v, 8, more=more)]), px=5 if k < 5 else 6.25)


# ---- pixel sizes in TIFF ----

SX, SY, STRIP = 120, 96, 24


def with_strip():
    """A field of noise, below it a black strip with a few letters' worth of white."""
    v = plane(200, SX, SY, 30) + [[0] * SX for _ in range(STRIP)]
    for y in range(SY + 8, SY + 16):
        for x in range(10, 60):
            v[y][x] = 255 * ((x // 3 + y) % 2)
    return v


def tagged(name, more, px, strip="-", order="<", big=False, first_only=True):
    v = with_strip()
    case(name, tiff([page(v, 8, order, rows=16, more=more)], order, big), px=px, strip=strip)


def ascii_tag(text, encoding="latin-1", tail=b"\0"):
    return (2, text.encode(encoding) + tail)


def pairs_block(line_end, comma, micro, item=True):
    lines = ["0", "0", "0", "2.3437e-008", "100", "2", "5000", "0", "0", "0.0052", "1", "3"]
    if item:
        lines += ["AP_IMAGE_PIXEL_SIZE", "Image Pixel Size = 0.2000 %sm" % micro]
    lines += ["AP_WIDTH", "Width = 24.00 %sm" % micro, "AP_PIXEL_SIZE", "Pixel Size = 23.44 nm", "DP_IMAGE_STORE", "Store resolution = 120 * 120",
              "AP_MAG", "Mag =    4.53 K X", "AP_STAGE_AT_T", "Stage at T =   0.0 °", "AP_FIB_PIXEL_SIZE", "FIB Pixel Size = 0.0 fm"]
    text = line_end.join(lines) + line_end
    return text.replace(".", ",") if comma else text


def sections_block(line_end, comma):
    text = line_end.join(["[User]", "Date=06/30/2024", "Time=05:06:40 PM", "[Beam]", "HV=5000", "Beam=EBeam", "Scan=EScan", "[Scan]",
                          "PixelWidth=2.5e-009", "PixelHeight=2.5e-009", "HorFieldsize=3.0e-007", "[Image]", "ResolutionX=%d" % SX,
                          "ResolutionY=%d" % SY, "[PrivateX]", "DatabarHeight=0", ""])
    return text.replace(".", ",") if comma else text


def chunks_block(line_end, comma):
    main = line_end.join(["ImageStripSize=%d" % STRIP, "PixelSizeX=4.8828e-9", "PixelSizeY=4.8828e-9", "Magnification=2.0e4", "Date=2016-05-16", ""])
    beam = line_end.join(["HV=5.0000e3", "StageTilt=0.0", "WD=4.9800e-3", ""])
    out = b""
    for kind, data in ((1, b"\0\1\2\3jp2"), (2, main.encode() + b"\0"), (3, beam.encode() + b"\0"), (0, b"")):
        data = data.replace(b".", b",") if comma and kind > 1 else data
        out += struct.pack("<IH", len(data) + 2, kind) + data
    return out


def layouts():
    for order in "<>":
        end = "le" if order == "<" else "be"
        for k, (line_end, comma) in enumerate((("\r\n", 0), ("\n", 0), ("\r", 0), ("\r\n", 1))):
            n = "%s%d.tif" % (end, k)
            for m, (micro, encoding) in enumerate((("\u00b5", "latin-1"), ("\u00b5", "utf-8"), ("\u03bc", "utf-8"), ("u", "ascii"))):
                block = pairs_block(line_end, comma, micro).replace("°", "\u00b0" if encoding != "ascii" else "deg")
                tagged("px_34118_%d%s" % (m, n), {34118: ascii_tag(block, encoding, b"\0" * (1 + 40 * m))}, 200, STRIP, order)
            tagged("px_34118_width_" + n, {34118: ascii_tag(pairs_block(line_end, comma, "\u00b5", False))}, 200, STRIP, order)
            wide = pairs_block(line_end, comma, "\u00b5").encode("utf-16-le")
            tagged("px_34119_" + n, {34119: (2, wide)}, 200, STRIP, order)
            tagged("px_34682_" + n, {34682: ascii_tag(sections_block(line_end, comma), tail=b" \0\0\0")}, 2.5, STRIP, order, True)
            tagged("px_50431_" + n, {50431: (1, chunks_block(line_end, comma))}, 4.8828, STRIP, order)
        units = {65003: (2, b"\xb5m\0"), 65004: (2, b"\xb5m\0"), 65009: (12, [0.0031]), 65010: (12, [0.0031])}
        tagged("px_65009_%s.tif" % end, units, 3.1, "-", order)
        tagged("px_65009_mrad_%s.tif" % end, {65003: (2, b"mrad\0"), 65009: (12, [0.0031]), 65010: (12, [0.0031])}, "none", "-", order)
        tagged("px_51123_%s.tif" % end, {51123: ascii_tag('{"PixelSizeUm": 0.0042, "Width": 9}')}, 4.2, "-", order)
        xml = ('<?xml version="1.0"?><Metadata><Optics><ScanFieldOfView><X>6.0E-007</X><Y>4.8E-007</Y></ScanFieldOfView></Optics>'
               '<ScanSettings><ScanSize><Width>%d</Width><Height>%d</Height></ScanSize></ScanSettings></Metadata>' % (SX, SY))
        tagged("px_34683_%s.tif" % end, {34683: ascii_tag(xml), 34682: ascii_tag("   \r\n")}, 5, "-", order)
        item = ('<Data><item><key><string>PixelSize</string></key><value><a><Name>Width</Name><Unit>Meter</Unit><anyType>2.5E-09</anyType></a>'
                '<a><Name>Height</Name><Unit>Meter</Unit><anyType>2.5E-09</anyType></a></value></item></Data>')
        tagged("px_34680_%s.tif" % end, {34680: (2, base64.b64encode(b'<?xml version="1.0"?>' + item.encode()))}, 2.5, "-", order)
        tagged("px_34680_magnification_%s.tif" % end, {34680: ascii_tag("[Vector]\r\nMagnification=20000\r\n")}, "none", "-", order)


def descriptions():
    def resolution(x, unit=3, text=None, encoding="utf-8", kind=5):
        tags = {282: (kind, x), 283: (kind, x), 296: (3, [unit])}
        if text is not None:
            tags[270] = ascii_tag(text, encoding)
        return tags
    print_size = [72, 1]
    ome = '<?xml version="1.0" encoding="UTF-8"?><OME xmlns="http://www.openmicroscopy.org/Schemas/OME/2016-06"><Image ID="Image:0"><Pixels SizeX="%d" %%s><TiffData/></Pixels></Image></OME>' % SX
    for name, tags, px in [
            ("cm", resolution([2000000, 1]), 5), ("inch", resolution([5080000, 1], 2), 5), ("none", resolution([2000000, 1], 1), "none"),
            ("dpi72", resolution([72, 1], 2), "none"), ("dpi_odd", resolution([4294967295, 29393153], 2), "none"), ("zero", resolution([1, 0]), "none"),
            ("nought", resolution([0, 0]), "none"), ("no_unit", dict((k, x) for k, x in resolution([5080000, 1]).items() if k != 296), 5),
            ("float", resolution([2000000.0], 3, kind=11), 5), ("unit_nm", resolution([200000, 1000000], 1, "P=1.53k\nunit=nm\nmin=0.0\n"), 5),
            ("unit_um", resolution([200, 1], 2, "P=1.53k\nunit=um\n"), 5), ("unit_micron", resolution([200, 1], 1, "P=1\r\nunit=micron\r\n"), 5),
            ("unit_escape", resolution([200, 1], 1, "P=1\nunit=\\u00B5m\n"), 5), ("unit_latin", resolution([200, 1], 1, "P=1\nunit=\u00b5m\n", "latin-1"), 5),
            ("unit_empty", resolution([1, 1], 1, "P=1\nunit=\nmin=0\n"), "none"), ("unit_pixel", resolution([200, 1], 1, "P=1\nunit=pixel\n"), "none"),
            ("no_unit_line", resolution([2, 10], 1, "P=1.53k\nmin=0.0\n"), "none"),
            ("json", resolution(print_size, 2, '{"pixel_size": {"x": 4.2e-09, "y": 4.2e-09}}'), 4.2),
            ("json_hfw", resolution(print_size, 2, '{"hfw": 6.0e-07, "resolution": [%d, %d]}' % (SX, SY)), 5),
            ("json_other", resolution(print_size, 2, '{"magnification": 20000}'), "none"),
            ("lines", resolution(print_size, 2, "Pixel size: 2.5 nm\nOperator: x"), 2.5), ("lines_comma", resolution(print_size, 2, "Pixel size = 2,51 nm"), 2.51),
            ("prose", resolution(print_size, 2, "the pixel size was 2.5 nm"), "none"),
            ("ome_nm", resolution(print_size, 2, ome % 'PhysicalSizeX="5.0" PhysicalSizeXUnit="nm" PhysicalSizeY="5.0" PhysicalSizeYUnit="nm"'), 5),
            ("ome_old", resolution(print_size, 2, ome % "PhysicalSizeX='0.0052' PhysicalSizeY='0.0052'"), 5.2),
            ("ome_pm", resolution(print_size, 2, ome % 'PhysicalSizeX="558.2" PhysicalSizeXUnit="pm"'), 0.5582),
            ("ome_angstrom", resolution(print_size, 2, ome % 'PhysicalSizeX="52" PhysicalSizeXUnit="\u00c5"'), 5.2),
            ("ome_pixel", resolution(print_size, 2, ome % 'PhysicalSizeX="52" PhysicalSizeXUnit="pixel"'), "none"),
            ("ome_mojibake", resolution(print_size, 2, ome % 'PhysicalSizeX="0.005" PhysicalSizeXUnit="\u00c2\u00b5m"'), 5),
            ("ome_doctype", resolution(print_size, 2, '<?xml version="1.0"?><!DOCTYPE OME [<!ENTITY a "5">]>' + (ome % 'PhysicalSizeX="5"')[38:]), "none")]:
        for order in "<>":
            tagged("px_%s_%s.tif" % (name, "le" if order == "<" else "be"), tags, px, STRIP, order)


# ---- sidecars ----

def sidecars():
    sem = ("[SemImageFile]\nImageName=%s.tif\nDataSize=120x96\nPixelSize=4.960938\nMagnification=190000\nWorkingDistance=8400 um\n"
           "AcceleratingVoltage=5000 Volt\nDate=06/30/2024\n")
    dollar = "$CM_FORMAT X-SEM\n$CM_MAG 20000\n$CM_FULL_SIZE 120 96\n$$SM_MICRON_BAR 100\n$$SM_MICRON_MARKER 500nm\n$CM_ACCEL_VOLT 5.00\n"
    main = "[MAIN]\nPixelSizeX=0.0000000025\nPixelSizeY=0.0000000025\nImageStripSize=24\n[SEM]\nHV=5000\n"
    for name, ending, text, px in [
            ("sem", ".txt", sem, 4.960938), ("dollar", ".txt", dollar, 5), ("dollar_whole", ".tif.txt", dollar, 5),
            ("dollar_newer", ".txt", dollar + "$CM_PIXEL_SIZE 0.0052\n", 5.2), ("hdr", ".hdr", main, 2.5), ("hdr_dash", "-tif.hdr", main, 2.5),
            ("own", ".txt", "# ours\npx_nm = 5.58\n", 5.58), ("unitless", ".txt", "pixel size = 5.58\n", "none"), ("scale", ".txt", "scale = 200 px/um\n", 5),
            ("json", ".json", '{"px_nm": 5.58}', 5.58), ("map", ".hdr", "ncols 120\nnrows 96\n", "none"),
            ("dollar_bare", ".txt", "$CM_FORMAT X-SEM\n$CM_MAG 20000\n$$SM_MICRON_MARKER 500nm\n", "none")]:
        for k, (encoding, line_end, mark) in enumerate((("utf-8", "\n", b""), ("utf-8", "\r\n", b"\xef\xbb\xbf"), ("utf-16-le", "\r\n", b"\xff\xfe"),
                                                        ("utf-16-be", "\r\n", b"\xfe\xff"), ("utf-16-le", "\n", b""))):
            stem = "side_%s_%d" % (name, k)
            body = (text % stem if "%s" in text else text).replace("\n", line_end).encode(encoding)
            beside(stem + ending, mark + body)
            tagged(stem + ".tif", {}, px)


    pointer = {270: ascii_tag('<OME><BinaryOnly MetadataFile="../elsewhere/x.companion.ome" UUID="urn:uuid:1"/></OME>')}
    image = ('<Image ID="Image:%d"><Pixels SizeX="120" PhysicalSizeX="%g" PhysicalSizeXUnit="nm"><TiffData IFD="0"><UUID FileName="%s">urn:uuid:%d</UUID>'
             '</TiffData></Pixels></Image>')
    both = "<OME>" + image % (0, 7.5, "other.ome.tif", 2) + image % (1, 5.25, "sub/side_companion.ome.tif", 1) + "</OME>"
    beside("side_companion.companion.ome", both.encode())
    tagged("side_companion.ome.tif", pointer, 5.25)
    tagged("side_alone.ome.tif", pointer, "none")
    beside("side_doctype.companion.ome", b'<!DOCTYPE OME [<!ENTITY a SYSTEM "file:///etc/passwd">]>' + both.encode())
    tagged("side_doctype.ome.tif", pointer, "none")


# ---- JPEG ----

def jpeg_segment(marker, data):
    return struct.pack(">BBH", 0xFF, marker, len(data) + 2) + data


def jpeg_blocks(bits=8, extra=b"", nx=NX, ny=NY):
    """Blocks of 8 x 8 pixels of one level each: a quantum of 8 makes a step of the first coefficient a level."""
    blocks = [[random.randint(0, 255) for _ in range(nx // 8)] for _ in range(ny // 8)]
    codes, last = [], 128
    for row in blocks:
        for v in row:
            d, last = v - last, v
            size = abs(d).bit_length()
            codes.append(format(size, "04b") + (format(d if d > 0 else d + (1 << size) - 1, "0%db" % size) if size else "") + "0")
    text = "".join(codes)
    text += "1" * (-len(text) % 8)
    scan = bytes(int(text[i:i + 8], 2) for i in range(0, len(text), 8)).replace(b"\xff", b"\xff\0")
    dc = bytes([0, 0, 0, 0, 10] + [0] * 12) + bytes(range(10))
    ac = bytes([0x10, 1] + [0] * 15) + b"\0"
    stream = (b"\xff\xd8" + extra + jpeg_segment(0xDB, bytes([0]) + bytes([8] * 64)) +
              jpeg_segment(0xC0 if bits == 8 else 0xC1, struct.pack(">BHHBBBB", bits, ny, nx, 1, 1, 0x11, 0)) + jpeg_segment(0xC4, dc) +
              jpeg_segment(0xC4, ac) + jpeg_segment(0xDA, bytes([1, 1, 0, 0, 63, 0])) + scan + b"\xff\xd9")
    pixels = [[blocks[y // 8][x // 8] for x in range(nx)] for y in range(ny)]
    return pixels, stream, levels(pixels, 255)


def exif(order, unit, x, description=None, orientation=1):
    tags = {274: (3, [orientation]), 282: (5, [x, 1]), 283: (5, [x, 1]), 296: (3, [unit])}
    if description:
        tags[270] = ascii_tag(description)
    # An Exif block is a TIFF without a picture: the strip the writer above adds is an empty one.
    return jpeg_segment(0xE1, b"Exif\0\0" + tiff([(tags, [b""], 273, 279)], order))


def jpegs():
    def jfif(unit, density):
        return jpeg_segment(0xE0, b"JFIF\0" + struct.pack(">HBHHBB", 0x102, unit, density, density, 0, 0))
    for name, extra, px in [
            ("plain", b"", "none"), ("jfif_72", jfif(1, 72), "none"), ("jfif_cm", jfif(2, 40000), 250), ("jfif_ratio", jfif(0, 40000), "none"),
            ("comment", jpeg_segment(0xFE, b"pixel size = 2.5 nm"), 2.5), ("exif_le", exif("<", 3, 2000000), 5), ("exif_be", exif(">", 2, 5080000), 5),
            ("exif_72", exif(">", 2, 72), "none"), ("exif_text", exif("<", 2, 72, "Pixel size: 4.9 nm"), 4.9),
            ("exif_unit", exif("<", 1, 200, "P=1\nunit=um\n"), 5), ("exif_cut", exif("<", 3, 2000000)[:30].replace(b"\xff\xe1", b"\xff\xe1", 1), "-")]:
        _, stream, want = jpeg_blocks(8, extra)
        if name == "exif_cut":
            short = exif("<", 3, 2000000)[4:30]
            _, stream, want = jpeg_blocks(8, jpeg_segment(0xE1, short))
            px = "none"
        case("jpg_%s.jpg" % name, stream, px=px, want=want)
    _, stream, want = jpeg_blocks(8, exif(">", 3, 2000000, None, 6))  # seen turned clockwise: the stored left column is the top row
    case("jpg_exif_turned.jpg", stream, px=5, want=[[want[NY - 1 - x][y] for x in range(NY)] for y in range(NX)])
    case("jpg_12bit.jpg", jpeg_blocks(12)[1], "refused")


# ---- hostile ----

def hostile():
    good = {"png": grey_png(), "tif": tiff([page(plane(255), 8, "<", 8, 10)]), "jpg": jpeg_blocks()[1]}
    for kind, data in good.items():
        for cut in [1, 4, 8, 12, 30, 60] + [len(data) * k // 10 for k in range(1, 10)] + [len(data) - 20]:
            case("cut_%s_%d.%s" % (kind, cut, kind), data[:cut], "refused")
        for k in range(12):
            broken = bytearray(data)
            for _ in range(6):
                broken[random.randrange(8, len(data) if k % 2 else min(400, len(data)))] = random.randrange(256)
            case("flip_%s_%d.%s" % (kind, k, kind), bytes(broken), "any")

    def claim(nx, ny, raw, depth=8, kind=0):
        return (b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", struct.pack(">IIBBBBB", nx, ny, depth, kind, 0, 0, 0)) + chunk(b"IDAT", zlib.compress(raw, 9)) +
                chunk(b"IEND", b""))
    case("bomb.png", claim(60000, 60000, bytes(4000000)), "refused")
    case("bomb_side.png", claim(2 ** 31 - 1, 1, bytes(1000)), "refused")
    case("bomb_text.png", grey_png(chunk(b"zTXt", b"Comment\0\0" + zlib.compress(bytes([120]) * 20000000, 9))), "any")
    case("zero.png", claim(0, 10, b""), "refused")
    case("one.png", claim(1, 1, b"\0\0"), "refused")
    case("palette_beyond.png", png([[(3,)] * NX] * NY, 8, 3, 0, chunk(b"PLTE", bytes(6))), "refused")
    case("palette_missing.png", png([[(3,)] * NX] * NY, 8, 3), "refused")
    case("depth.png", claim(64, 64, bytes(64 * 65), 3), "refused")
    case("crc.png", good["png"][:-16] + bytes([good["png"][-16] ^ 1]) + good["png"][-15:], "refused")
    for name, data in (("empty.png", b""), ("text.tif", b"hello there"), ("gif.png", b"GIF89a" + bytes(40)), ("zip.tif", b"PK\3\4" + bytes(40)),
                       ("bmp.jpg", b"BM" + bytes(60)), ("soi.jpg", b"\xff\xd8\xff")):
        case(name, data, "refused")

    def entries(list_of, after=0):
        out = b"II*\0\x08\0\0\0" + struct.pack("<H", len(list_of))
        for e in list_of:
            out += struct.pack("<HHII", *e)
        return out + struct.pack("<I", after) + bytes(64)
    size = [(256, 4, 1, 64), (257, 4, 1, 64), (258, 3, 1, 8), (259, 3, 1, 1), (262, 3, 1, 1)]
    case("cycle.tif", entries(size, 8), "refused")
    case("far.tif", entries(size + [(273, 4, 1, 0xFFFFFFF0), (279, 4, 1, 4096)]), "refused")
    case("many_strips.tif", entries(size[:3] + [(273, 4, 0x7FFFFFFF, 8), (279, 4, 0x7FFFFFFF, 8)]), "refused")
    case("huge.tif", entries([(256, 4, 1, 60000), (257, 4, 1, 60000)] + size[2:] + [(273, 4, 1, 8), (279, 4, 1, 100)]), "refused")
    case("wide.tif", entries([(256, 4, 1, 0xFFFFFFFF), (257, 4, 1, 0xFFFFFFFF)] + size[2:] + [(273, 4, 1, 8), (279, 4, 1, 100)]), "refused")
    case("no_tags.tif", entries([]), "refused")
    nothing = float("nan")
    few = [[float(x) for x in r] for r in plane(99)]
    few[3][4] = nothing
    case("nan_few.tif", tiff([page(few, "f")]))
    case("nan_many.tif", tiff([page([[nothing] * NX] * (NY // 2) + few[NY // 2:], "f")]), "refused")
    case("inf_many.tif", tiff([page([[float("inf")] * NX] * (NY // 2) + few[NY // 2:], "f")]), "refused")
    case("nan_all.tif", tiff([page([[nothing] * NX] * NY, "d")]), "refused")
    case("deep.tif", tiff([page(plane(255), 8, more={270: ascii_tag("<OME>" * 3000)})]), px="none")
    case("chunk_lies.tif", tiff([page(plane(255), 8, more={50431: (1, struct.pack("<IH", 0xFFFFFFF0, 2) + b"PixelSizeX=5e-9")})]), px="none")
    case("blank_block.tif", tiff([page(plane(255), 8, more={34118: (2, bytes(4000)), 34682: (2, b" " * 400), 282: (5, [2000000, 1]), 283: (5, [2000000, 1]), 296: (3, [3])})]), px=5)
    case("long_lines.tif", tiff([page(plane(255), 8, more={34118: (2, b"A" * 300000), 34682: (2, b"[" * 300000)})]), px="none")
    case("json_deep.tif", tiff([page(plane(255), 8, more={270: ascii_tag('{"a":' * 5000)})]), px="none")


png_variants()
png_scales()
tiff_depths()
tiff_codecs()
tiff_colours()
tiff_pages()
layouts()
descriptions()
sidecars()
jpegs()
hostile()
with open(os.path.join(OUT, "cases.txt"), "w") as f:
    f.write("\n".join(cases) + "\n")
