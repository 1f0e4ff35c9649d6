#!/usr/bin/env python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Write the small run files of this folder and, from the numbers they were made of, what a reader
must find in them: good.tsv (values, units, segments, origins) and hostile.tsv (the refusal, with its
line and column). All data are invented. Run it in this folder; the results are committed.

The expectations come from the truth each file was written from, never from the reader."""
import math

good, hostile = [], []
ZERO_C = 273.15


def curve(T, tg=330.0):
    return 0.2 + 0.0008 * (T - 300.0) + 0.06 / (1.0 + math.exp(-(T - tg) / 1.5))


def ramp(T0, T1, rate=10.0, n=40, t0=0.0, cool_offset=0.4):
    """(t/s, T/K, W/g endo up) of n points from T0 to T1 at a rate in K/min."""
    out = []
    for i in range(n):
        T = T0 + (T1 - T0) * i / (n - 1)
        t = t0 + 60.0 * abs(T - T0) / rate
        out.append((t, T, curve(T) if T1 >= T0 else curve(T) - cool_offset))
    return out


def hold(T, seconds=120.0, n=25, t0=0.0):
    return [(t0 + seconds * i / (n - 1), T, 0.2) for i in range(n)]


def chain(*parts):
    """Parts one after the other in time; a part's clock starts where the last one ended."""
    out, t = [], 0.0
    for make in parts:
        seg = make(t)
        out += seg
        t = seg[-1][0] + (seg[1][0] - seg[0][0])
    return out


def num(x, digits, comma=False, fmt="f"):
    s = f"{x:.{digits}{fmt}}"
    return s.replace(".", ",") if comma else s


class Table:
    """Rows as text, and the values that text stands for."""

    def __init__(self, pts, order="tTy", tu="s", Tu="°C", yu="W/g", sign=1, mass_mg=None, comma=False,
                 digits=(2, 3, 5), fmts="fff"):
        self.rows, self.val = [], []
        for t, T, y in pts:
            tv = {"s": t, "min": t / 60.0, "h": t / 3600.0}.get(tu, t)
            Tv = {"°C": T - ZERO_C, "K": T, "°F": (T - ZERO_C) * 9 / 5 + 32}[Tu]
            yv = sign * y * {"W/g": 1, "mW/mg": 1, "W/kg": 1e3, "mW": mass_mg or 1, "µW": 1e3 * (mass_mg or 1),
                             "W": 1e-3 * (mass_mg or 1), "J/(g K)": 6.0, "mJ/(s mg)": 1}[yu]
            text = {"t": num(tv, digits[0], comma, fmts[0]), "T": num(Tv, digits[1], comma, fmts[1]),
                    "y": num(yv, digits[2], comma, fmts[2])}
            self.rows.append([text[k] for k in order])
            back = {k: float(v.replace(",", ".")) for k, v in text.items()}
            s = back["t"] * {"s": 1, "min": 60.0, "h": 3600.0}.get(tu, 1)
            K = {"°C": back["T"] + ZERO_C, "K": back["T"], "°F": (back["T"] - 32) * 5 / 9 + ZERO_C}[Tu]
            v = sign * back["y"] * {"W/g": 1, "mW/mg": 1, "W/kg": 1e-3, "mW": 1, "µW": 1e-3, "W": 1e3, "J/(g K)": 1,
                                    "mJ/(s mg)": 1}[yu]
            if yu in ("mW", "µW", "W") and mass_mg and self.known_mass():
                v = v / mass_mg
            self.val.append((s if "t" in order else None, K, v))

    def known_mass(self):
        return True

    def text(self, sep, end="\n", pad=False):
        rows = self.rows
        if pad:
            rows = [[c.rjust(12) for c in r] for r in rows]
        return "".join(sep.join(r) + end for r in rows)


class NoMass(Table):
    def known_mass(self):
        return False


def write(name, data):
    with open(name, "wb") as f:
        f.write(data if isinstance(data, bytes) else data.encode("utf-8"))


def ok(name, data, val, unit="W/g", mass="-", origin="stated", segments="H", facts="-", warn="-", options="-"):
    write(name, data)
    f, l = val[0], val[-1]
    cells = [name, options, str(len(val)), unit, str(mass), origin, segments]
    for a, b in ((f[0], l[0]), (f[1], l[1]), (f[2], l[2])):
        cells += ["-" if a is None else repr(a), "-" if b is None else repr(b)]
    good.append("\t".join(cells + [facts, warn]))


def bad(name, data, line, column, message, options="-"):
    if data is not None:
        write(name, data)
    hostile.append("\t".join([name, options, str(line), str(column), message]))


H = ramp(300.0, 360.0)
EN = "Time (s),Temperature (°C),Heat flow endo up (W/g)\n"

# ---- encodings and line ends
t = Table(H)
ok("utf8.csv", EN + t.text(","), t.val, facts="encoding=UTF-8;delimiter=comma;decimal mark=point;header=names")
ok("utf8-bom.csv", b"\xef\xbb\xbf" + (EN + t.text(",")).encode(), t.val, facts="encoding=UTF-8 with byte order mark")
ok("utf16le.txt", b"\xff\xfe" + (EN + t.text(",")).encode("utf-16-le"), t.val, facts="encoding=UTF-16LE with byte order mark")
ok("utf16be.txt", b"\xfe\xff" + (EN + t.text(",")).encode("utf-16-be"), t.val, facts="encoding=UTF-16BE with byte order mark")
ok("utf16le-unmarked.txt", (EN + t.text(",")).encode("utf-16-le"), t.val, facts="encoding=UTF-16LE")
ok("utf16be-unmarked.txt", (EN + t.text(",")).encode("utf-16-be"), t.val, facts="encoding=UTF-16BE")
ok("latin1.csv", (EN + t.text(",")).encode("latin-1"), t.val, facts="encoding=Windows-1252")
ok("cp850.csv", (EN + t.text(",")).encode("cp850"), t.val, facts="encoding=CP850", options="encoding=CP850")
ok("crlf.csv", (EN + t.text(",")).replace("\n", "\r\n"), t.val)
ok("cr.csv", (EN + t.text(",")).replace("\n", "\r"), t.val)
ok("no-last-line-end.csv", (EN + t.text(","))[:-1], t.val)
ok("control-z.csv", EN + t.text(",") + "\x1a", t.val)
t = Table(H, yu="µW", mass_mg=8.25)
ok("latin1-micro.txt", ("Sample mass: 8.25 mg\nTime/s\tTemp./°C\tHeat flow/µW endo up\n" + t.text("\t")).encode("latin-1"),
   t.val, mass=8.25, facts="signal unit=µW;delimiter=tab")

# ---- delimiters, decimal marks, quoting, padding
t = Table(H)
for sep, nm, word in ((";", "semicolon", "semicolon"), ("\t", "tab", "tab"), ("|", "pipe", "pipe")):
    ok(f"{nm}.txt", EN.replace(",", sep) + t.text(sep), t.val, facts=f"delimiter={word}")
ok("blanks.txt", "t/s T/°C HF/(W/g) \n".replace("HF/", "HF_endo_up/") + t.text("  "), t.val, facts="delimiter=blanks")
ok("blanks-padded.txt", "    Time [s]   Temperature [°C]    Heat flow endo up [W/g]\n" + t.text(" ", pad=True), t.val,
   facts="delimiter=blanks")
ok("comma-padded.csv", EN + t.text(" , ", pad=True), t.val)
ok("trailing-delimiter.csv", EN.replace("\n", ",\n") + t.text(",", end=",\n"), t.val)
ok("trailing-in-rows-only.csv", EN + t.text(";", end=";\n").replace(";", ","), t.val)
c = Table(H, comma=True)
ok("decimal-comma.csv", EN.replace(",", ";") + c.text(";"), c.val, facts="delimiter=semicolon;decimal mark=comma")
ok("decimal-comma-tab.txt", EN.replace(",", "\t") + c.text("\t"), c.val, facts="delimiter=tab;decimal mark=comma")
ok("decimal-comma-blanks.txt", "Time[s]  Temperature[°C]  Heatflow[W/g]\n# endo up\n".replace("# endo up\n", "") + c.text("   "),
   c.val, origin="default", facts="delimiter=blanks;decimal mark=comma")
ok("decimal-comma-quoted.csv", '"Time (s)","Temperature (°C)","Heat flow endo up (W/g)"\n' +
   "".join(",".join(f'"{x}"' for x in r) + "\n" for r in c.rows), c.val, facts="delimiter=comma;decimal mark=comma")
ok("quoted.csv", '"Time (s)","Temperature (°C)","Heat flow, endo up (W/g)"\n' +
   "".join(",".join(f'"{x}"' for x in r) + "\n" for r in t.rows), t.val)
e = Table(H, digits=(2, 4, 4), fmts="fee")
ok("exponents.csv", EN + e.text(","), e.val)
mixed = Table(H, digits=(2, 3, 5))
rows = [r[:2] + [f"{float(r[2]):.4e}" if i % 3 == 0 else r[2]] for i, r in enumerate(mixed.rows)]
ok("mixed-notation.csv", EN + "".join(",".join(r) + "\n" for r in rows),
   [(a, b, float(r[2])) for (a, b, _), r in zip(mixed.val, rows)])
m = Table(ramp(250.0, 310.0))
ok("typographic-minus.csv", EN + m.text(",").replace("-", "\u2212"), m.val)

# ---- headers in four languages, units in every place
for nm, head, order, tu, Tu, yu, sign in (
    ("german.csv", "Zeit [min];Temperatur [°C];Wärmestrom, exo nach oben [mW/mg]", "tTy", "min", "°C", "mW/mg", -1),
    ("german-ascii.csv", "Temperatur in °C;Zeit in min;Waermefluss in W/g (endo unten)", "Tty", "min", "°C", "W/g", -1),
    ("french.csv", "Temps (min);Température (°C);Flux de chaleur (mW/mg) exo vers le haut", "tTy", "min", "°C", "mW/mg", -1),
    ("french-endo.csv", "Temps [s];Température d'échantillon [K];Flux thermique [W/g] endo vers le haut", "tTy", "s", "K", "W/g", 1),
    ("spanish.csv", "Tiempo (s);Temperatura (°C);Flujo de calor (W/g) exo hacia arriba", "tTy", "s", "°C", "W/g", -1),
    ("spanish-down.csv", "Tiempo / min;Temperatura / K;Flujo de calor / W/g, endo hacia abajo", "tTy", "min", "K", "W/g", -1),
    ("arrow.csv", "t/s;T/K;DSC/(mW/mg) exo \u2191", "tTy", "s", "K", "mW/mg", -1),
    ("caret.csv", "Time/min;Temp./°C;DSC/(mW/mg) ^exo", "tTy", "min", "°C", "mW/mg", -1),
    ("hours.csv", "Time (h);Temperature (K);Heat flow (W/g) exo down", "tTy", "h", "K", "W/g", 1),
    ("fahrenheit.csv", "Time (s);Temperature (°F);Heat flow (W/g) endo up", "tTy", "s", "°F", "W/g", 1),
    ("per-kilogram.csv", "Time (s);Temperature (K);Heat flow (W/kg) endo up", "tTy", "s", "K", "W/kg", 1),
    ("joule-per-second.csv", "Time (s);Temperature (K);Heat flow mJ/(s mg) endo up", "tTy", "s", "K", "mJ/(s mg)", 1),
    ("misspelt.csv", " Time  (s) ;Tempreature (K) ;Heat  Flow   (W/g) endo up ", "tTy", "s", "K", "W/g", 1),
    ("any-order.csv", "Heat flow endo up (W/g);Temperature (K);Time (s)", "yTt", "s", "K", "W/g", 1),
):
    d = {"h": (5, 3, 5)}.get(tu, (4, 3, 5))
    t = Table(H, order=order, tu=tu, Tu=Tu, yu=yu, sign=sign, digits=d)
    unit = {"mW/mg": "W/g", "W/kg": "W/g", "mJ/(s mg)": "W/g"}.get(yu, yu)
    ok(nm, head + "\n" + t.text(";"), t.val, unit=unit)
t = Table(H)
ok("units-row.csv", "Time,Temperature,Heat flow exo down\ns,°C,W/g\n" + t.text(","), t.val, facts="header=names, units below")
ok("units-row-bracketed.csv", "Time,Temp,Heat Flow endo up\n[s],[°C],[W/g]\n" + t.text(","), t.val, facts="time unit=s")
ok("header-blank-line.csv", "Time,Temperature,Heat flow endo up\ns,°C,W/g\n\n" + t.text(","), t.val)
ok("commented-header.csv", "# run of sample A\n##" + EN + t.text(","), t.val)
cp = Table(H, yu="J/(g K)")
ok("heat-capacity.csv", "Temperature (°C);Time (s);Cp (J/(g K))\n" + "".join(f"{b};{a};{c}\n" for a, b, c in cp.rows), cp.val,
   unit="J/(g K)", origin="stated")
cpm = Table(H, yu="J/(g K)", tu="min", digits=(5, 3, 5))
ok("heat-capacity-german.csv", "Zeit/min;Temperatur/°C;spezifische Wärmekapazität/(J/(g·K))\n" + cpm.text(";"), cpm.val,
   unit="J/(g K)")
extra = "".join(f"{i};{r[0]};{r[1]};{r[1]};{r[2]};50\n" for i, r in enumerate(t.rows, 1))
ok("extra-columns.csv", "Index;Time (s);Sample temperature (°C);Program temperature (°C);Heat flow endo up (W/g);Purge flow (ml/min)\n"
   .replace("(ml/min)", "") + extra, t.val, facts="temperature column=3 'Sample temperature (°C)'")
both = Table(H, yu="mW", mass_mg=5.0)
ok("two-heat-flows.csv", "Time (s);Temperature (°C);Heat flow (mW);Heat flow endo up (W/g)\n" +
   "".join(f"{r[0]};{r[1]};{b[2]};{r[2]}\n" for r, b in zip(t.rows, both.rows)), t.val, warn="is taken")
ok("difference-column.csv", "Time (s);Temperature (°C);Temperature difference (K);Heat flow endo up (W/g)\n" +
   "".join(f"{r[0]};{r[1]};0.1;{r[2]}\n" for r in t.rows), t.val)
ok("text-column.csv", "Time (s),Temperature (°C),Heat flow endo up (W/g),Phase\n" +
   "".join(",".join(r) + ",ramp\n" for r in t.rows), t.val)

# ---- mass, rate, preamble
mw = Table(H, yu="mW", mass_mg=10.722, sign=-1, comma=True)
ok("mass-cells.csv", "Probe;M7-2\nMasse;10,722;mg\n\nTemperatur;Zeit;Wärmestrom (exo up)\n°C;s;mW\n" +
   "".join(f"{r[1]};{r[0]};{r[2]}\n" for r in mw.rows), mw.val, mass=10.722, facts="sample=M7-2")
mw = Table(H, yu="mW", mass_mg=6.5)
ok("mass-colon.txt", "Sample: M7-2\nSample mass: 6.5 mg\nHeating rate: 10 K/min\n\n" + EN.replace("W/g", "mW").replace(",", "\t") + mw.text("\t"),
   mw.val, mass=6.5, facts="declared rate=10 K/min, not used: the run has times")
ok("mass-unit-in-key.csv", "Mass (mg),6.5\n" + EN.replace("W/g", "mW") + mw.text(","), mw.val, mass=6.5)
ok("mass-gram.csv", "# Einwaage = 0.0065 g\n" + EN.replace("W/g", "mW") + mw.text(","), mw.val, mass=6.5)
ok("mass-option.csv", EN.replace("W/g", "mW") + mw.text(","), mw.val, mass=6.5, options="mass=6.5")
nm = NoMass(H, yu="mW", mass_mg=6.5)
ok("mass-unknown.csv", EN.replace("W/g", "mW") + nm.text(","), nm.val, unit="mW")
ok("mass-without-unit.csv", "Mass,6.5\n" + EN.replace("W/g", "mW") + nm.text(","), nm.val, unit="mW", warn="not used; give --mass")
w = Table(H, yu="W", mass_mg=6.5, digits=(2, 3, 8))
ok("watt.csv", "Mass,6.5 mg\n" + EN.replace("W/g", "W") + w.text(","), w.val, mass=6.5)
ok("long-preamble.csv", "".join(f"Parameter {i}: value {i}\n" for i in range(125)) + "Exotherm: up\n" +
   "Time (s),Temperature (°C),Heat flow (W/g)\n" + Table(H, sign=-1).text(","), Table(H, sign=-1).val)
ok("sign-in-preamble.csv", "Heat flow direction: endo up\nTime (s),Temperature (°C),Heat flow (W/g)\n" + t.text(","), t.val)
ok("sign-option.csv", "Time (s),Temperature (°C),Heat flow (W/g)\n" + Table(H, sign=-1).text(","), Table(H, sign=-1).val,
   origin="option", options="sign=exo-up")
ok("sign-unstated.csv", "Time (s),Temperature (°C),Heat flow (W/g)\n" + t.text(","), t.val, origin="default")
ok("sign-by-number.csv", "Direction: -1\nTime (s),Temperature (°C),Heat flow (W/g)\n" + t.text(","), t.val, origin="default",
   warn="give --sign")
slow = Table(ramp(300.0, 360.0, rate=3.0))
ok("declared-rate-wrong.csv", "Heating rate: 10 K/min\n" + EN + slow.text(","), slow.val, warn="the latter is used")
nt = Table(H, order="Ty")
ok("no-time-declared-rate.csv", "Heating rate,10 K/min\nTemperature (°C),Heat flow endo up (W/g)\n" + nt.text(","), nt.val)
ok("no-time-rate-option.csv", "Temperature (°C),Heat flow endo up (W/g)\n" + nt.text(","), nt.val, options="rate=10")
ok("no-time-no-rate.csv", "Temperature (°C),Heat flow endo up (W/g)\n" + nt.text(","), nt.val, warn="give --rate")

# ---- units not stated; columns told by option or behaviour
ok("time-unit-guessed.csv", "Time,Temperature (°C),Heat flow endo up (W/g)\n" + t.text(","), t.val, facts="time unit=s")
tm = Table(H, tu="min", digits=(5, 3, 5))
ok("time-unit-guessed-min.csv", "Time,Temperature (°C),Heat flow endo up (W/g)\n" + tm.text(","), tm.val, facts="time unit=min")
ok("temperature-unit-guessed.csv", "Time (s),Temperature,Heat flow endo up (W/g)\n" + t.text(","), t.val, facts="temperature unit=°C",
   warn="°C is taken")
ok("signal-unit-unstated.csv", "Time (s),Temperature (°C),Heat flow endo up\n" + t.text(","), t.val, unit="unit not stated",
   warn="give --signal-unit")
ok("signal-unit-option.csv", "Time (s),Temperature (°C),Heat flow endo up [arb.]\n" + t.text(","), t.val, options="signal-unit=W/g")
ok("headerless.csv", t.text(","), t.val, unit="unit not stated", origin="default", facts="header=none;time column=1;temperature column=2",
   warn="°C is taken")
pr = Table(chain(lambda s: ramp(300, 360, t0=s), lambda s: ramp(360, 300, t0=s)), order="yTt")
ok("headerless-order.txt", pr.text("\t"), pr.val, unit="unit not stated", origin="guessed", segments="H C",
   facts="header=none;time column=3;temperature column=2;signal column=1", warn="°C is taken")
ok("columns-by-number.csv", "a,b,c\n" + t.text(","), t.val, origin="default",
   options="time-column=1;temperature-column=2;signal-column=3;time-unit=s;temperature-unit=°C;signal-unit=W/g")
ok("columns-by-name.csv", "Time (s),T1 (°C),T2 (°C),S1 (W/g),S2 (W/g)\n" + "".join(f"{r[0]},{r[1]},0,{r[2]},0\n" for r in t.rows), t.val,
   origin="default", options="temperature-column=T1;signal-column=S1")

# ---- programmes and layouts of several segments
prog = chain(lambda s: ramp(300, 360, 20, t0=s), lambda s: hold(360, t0=s), lambda s: ramp(360, 300, 20, t0=s),
             lambda s: hold(300, t0=s), lambda s: ramp(300, 360, 10, t0=s))
p = Table(prog)
ok("programme.csv", EN + p.text(","), p.val, segments="H I C I H")
ok("programme-sign-from-physics.csv", "Time (s),Temperature (°C),Heat flow (W/g)\n" + Table(prog, sign=-1).text(","),
   Table(prog, sign=-1).val, segments="H I C I H", origin="guessed")
two = chain(lambda s: ramp(300, 330, 10, t0=s), lambda s: ramp(330.75, 360, 20, t0=s))
p2 = Table(two)
ok("two-rates.csv", EN + p2.text(","), p2.val, segments="H H")
a, b = Table(ramp(300, 360, t0=0)), Table(ramp(300, 360, t0=900))
ok("stacked-repeated-header.csv", EN + a.text(",") + EN + b.text(","), a.val + b.val, segments="H H", facts="layout=2 tables stacked")
ok("stacked-titles.csv", "First heating\n" + EN + a.text(",") + "\nSecond heating\n" + EN + b.text(","), a.val + b.val, segments="H H")
ok("stacked-segment-titles.csv", "Segment 1: ramp\n" + EN + a.text(",") + "\nSegment 2: ramp\n" + EN + b.text(","), a.val + b.val, segments="H H")
ok("stacked-blank-line.csv", EN + a.text(",") + "\n" + b.text(","), a.val + b.val, segments="H H")
ok("stacked-clock-restarts.csv", EN + a.text(",") + a.text(","), a.val + a.val, segments="H H")
ok("stacked-unmarked.csv", EN + a.text(",") + b.text(","), a.val + b.val, segments="H H")
ok("blank-line-within.csv", EN + "".join(",".join(r) + "\n" + ("\n" if i == 20 else "") for i, r in enumerate(a.rows)), a.val)
ok("double-spaced.csv", EN + "".join(",".join(r) + "\n\n" for r in a.rows), a.val)
seg = "".join(f"{k},{','.join(r)}\n" for k, tb in ((1, a), (2, b)) for r in tb.rows)
ok("segment-column.csv", "Segment," + EN + seg, a.val + b.val, segments="H H", facts="layout=segments numbered in column 1")
side = "".join(f"{','.join(r)},{','.join(q)}\n" for r, q in zip(a.rows, b.rows))
ok("side-by-side.csv", EN.strip() + "," + EN + side, a.val + b.val, segments="H H", facts="layout=2 segments side by side")
short = Table(ramp(300, 360, t0=900, n=30))
side = "".join(",".join(r) + "," + (",".join(short.rows[i]) if i < 30 else ",,") + "\n" for i, r in enumerate(a.rows))
ok("side-by-side-unequal.csv", EN.strip() + "," + EN + side, a.val + short.val, segments="H H")
h, k = Table(ramp(300, 360), order="Ty"), Table(ramp(360, 300)[::-1], order="Ty")
ok("side-by-side-sorted.csv", "Heating T (°C),Heating HF endo up (W/g),Cooling T (°C),Cooling HF endo up (W/g)\n".replace(" T (", " temperature (").replace("HF", "heat flow") +
   "".join(f"{','.join(r)},{','.join(q)}\n" for r, q in zip(h.rows, k.rows)), h.val + k.val[::-1], segments="H C", options="rate=10",
   warn="turned round")
named = "".join(f"{k},{','.join(r)}\n" for k, tb in (("heat1", a), ("heat2", b)) for r in tb.rows)
ok("segment-names.csv", "Segment," + EN + named, a.val + b.val, segments="H H", facts="layout=segments numbered in column 1")
ok("one-temperature.csv", "Temperature (°C),Heating heat flow endo up (W/g),Cooling heat flow endo up (W/g)\n" +
   "".join(f"{r[0]},{r[1]},{q[1]}\n" for r, q in zip(h.rows, k.rows)), h.val + k.val[::-1], segments="H C", options="rate=10",
   facts="layout=2 segments side by side", warn="turned round")
ok("entries-between.csv", "Sample mass: 6.5 mg\n" + EN.replace("W/g", "mW") + mw.text(",") + "Sample mass: 6.5 mg\n" +
   EN.replace("W/g", "mW") + mw.text(","), mw.val + mw.val, mass=6.5, segments="H H")
ok("sign-below.csv", EN.replace(" endo up", "") + Table(H, sign=-1).text(",") + "Heat flow: exo up\n", Table(H, sign=-1).val)
ok("numbers-above.csv", "Calibration of the furnace\n1,156.60,156.52\n2,231.93,231.70\n3,327.46,327.30\n\n" + EN + t.text(","), t.val,
   facts="header=names", warn="numbers above the header of line 6 are not used")
ok("mass-other-overruled.csv", "Sample mass: 6.5 mg\nMass: 7 mg\n" + EN.replace("W/g", "mW") + mw.text(","), mw.val, mass=6.5,
   options="mass=6.5")
ok("rate-unusual.csv", EN + Table(ramp(300, 360, 180), digits=(4, 3, 5)).text(","), Table(ramp(300, 360, 180), digits=(4, 3, 5)).val,
   warn="which is unusual")
ok("kelvin-very-cold.csv", "Time (s),Temperature (K),Heat flow endo up (W/g)\n" + Table(ramp(120, 180), Tu="K").text(","),
   Table(ramp(120, 180), Tu="K").val, warn="if the values are °C")

# ---- traps: fillers, damaged rows, empty cells, irregular and repeated values
f = Table(H, Tu="K")
ok("filler-row.csv", "Time (s),Temperature (K),Heat flow endo up (W/g)\n0,273.15,0\n" + f.text(","), f.val, warn="filler row")
ok("filler-celsius.csv", EN + "0,0,0\n" + t.text(","), t.val, warn="filler row")
ok("first-row-damaged.csv", EN + "--,--,0.1\n" + t.text(","), t.val, warn="first row is left out")
ok("last-row-cut.csv", EN + t.text(",") + "361.0,86", t.val, warn="last row left out")
ok("footer.csv", EN + t.text(",") + "\nEnd of measurement\n", t.val, warn="after the table")
ok("empty-at-both-ends.csv", EN + ",26.0,\n,26.5,\n" + t.text(",") + ",87.0,\n", t.val, warn="left out")
ok("time-from-1200.csv", EN + Table(ramp(300, 360, t0=1200)).text(","), Table(ramp(300, 360, t0=1200)).val)
irr = Table([(60 * (T - 300) / 10, T, curve(T)) for T in (300 + 60 * (i / 39) ** 1.3 for i in range(40))])
ok("irregular-steps.csv", EN + irr.text(","), irr.val)
coarse = Table(ramp(300, 420, n=25), digits=(1, 1, 5))
ok("five-kelvin-steps.csv", EN + coarse.text(","), coarse.val)
rep = Table(ramp(300, 360, n=120), digits=(2, 0, 5))
ok("repeated-temperatures.csv", EN + rep.text(","), rep.val)
wob = Table([(t_, T + (0.05 if i % 2 else -0.05) * (i % 5 == 0), y) for i, (t_, T, y) in enumerate(ramp(300, 360, n=800))])
ok("wobbling-temperature.csv", EN + Table(wob.val and [(a_, b_ + 0.0, c_) for a_, b_, c_ in ramp(300, 360, n=60)]).text(","),
   Table(ramp(300, 360, n=60)).val)
ok("kelvin-is-celsius-overruled.csv", "Time (s),Temperature [K],Heat flow endo up (W/g)\n" + t.text(","), t.val,
   options="temperature-unit=°C")
ok("minutes-under-s-overruled.csv", EN + tm.text(","), tm.val, options="time-unit=min")

# ---- hostile: line, column and words of the refusal
R = t.text(",")
L = R.splitlines(True)


def put(i, row):
    """The table with row i (from 0) replaced; rows begin in line 2."""
    return EN + "".join(L[:i]) + row + "".join(L[i + 1:])


bad("h-empty.csv", "", 1, 1, "empty")
bad("h-blank-lines.csv", "\n\n  \n", 1, 0, "no rows of numbers")
bad("h-prose.txt", "Dear colleague,\nplease find the runs enclosed.\n", 1, 0, "no rows of numbers")
bad("h-header-only.csv", EN, 1, 0, "no rows of numbers")
bad("h-one-column.csv", "Temperature\n" + "".join(r[1] + "\n" for r in t.rows), 1, 0, "at least two columns")
bad("h-few-rows.csv", EN + "".join(L[:3]), 2, 0, "only 3 rows")
bad("h-nul.csv", put(10, "1\x00,2,3\n"), 12, 2, "NUL byte")
bad("h-control.csv", put(10, "1,2\x07,3\n"), 12, 4, "control byte")
noise = bytes(32 + (i * 37 + 11) % 224 for i in range(512))
bad("h-binary.bin", noise, 1, 1 + min(noise.index(x) for x in (0x81, 0x8D, 0x8F, 0x90, 0x9D)), "letter in no encoding")
bad("h-not-utf8.csv", (EN + R).encode("latin-1"), 1, 23, "not UTF-8", options="encoding=UTF-8")
bad("h-utf16-half.txt", b"\xff\xfe" + (EN + R).encode("utf-16-le")[:-1], 41, len(L[-1]), "half a character")
bad("h-utf16-surrogate.txt", b"\xff\xfe" + "Time\n".encode("utf-16-le") + b"\x00\xdc" + EN.encode("utf-16-le"), 2, 1, "surrogate")
bad("h-no-such-encoding.csv", EN + R, 0, 0, "unknown encoding", options="encoding=klingon")
bad("h-unclosed-quote.csv", put(10, '1,"2,3\n'), 12, 2, "never closed")
bad("h-short-row.csv", put(10, "15.4,28.3\n"), 12, 3, "row ends after 2 cells")
bad("h-long-row.csv", put(10, "15.4,28.3,0.1,7\n"), 12, 4, "row has 4 cells")
bad("h-nan.csv", put(10, "15.4,28.3,NaN\n"), 12, 3, "cannot read 'NaN'")
bad("h-inf.csv", put(10, "15.4,-inf,0.2\n"), 12, 2, "cannot read '-inf'")
bad("h-hex.csv", put(10, "0x1F,28.3,0.2\n"), 12, 1, "cannot read '0x1F'")
bad("h-all-nan-row.csv", put(10, "nan,nan,nan\n"), 12, 1, "cannot read 'nan'")
bad("h-too-large.csv", put(10, "15.4,28.3,1e999\n"), 12, 3, "cannot read '1e999'")
bad("h-letter-o.csv", put(10, "15.4,28.3,0.2O1\n"), 12, 3, "cannot read '0.2O1'")
bad("h-date.csv", put(10, "15.4,28.3,12/2024\n"), 12, 3, "cannot read '12/2024'")
bad("h-mixed-decimal.csv", EN.replace(",", ";") + "".join(L[:10]).replace(",", ";") + "15,4;28.3;0.2\n" + "".join(L[11:]).replace(",", ";"),
    12, 1, "decimal comma where the table has decimal points")
bad("h-decimal-changes.csv", EN.replace(",", ";") + "".join(L[:30]).replace(",", ";") + "".join(L[30:]).replace(",", ";").replace(".", ","),
    32, 1, "decimal comma where the table has decimal points")
bad("h-thousands.csv", EN.replace(",", ";") + "".join(L[:10]).replace(",", ";") + "1,015.4;28.3;0.2\n" + "".join(L[11:]).replace(",", ";"),
    12, 1, "thousands mark")
bad("h-decimal-comma-in-comma.csv", EN + "".join(",".join(x.replace(".", ",") for x in r) + "\n" for r in t.rows), 1, 0,
    "the header names 3 columns, the rows have 6: decimal commas")
bad("h-unknown-unit.csv", EN.replace("W/g", "BTU/h") + R, 1, 3, "unknown unit 'BTU/h'")
bad("h-unknown-temperature-unit.csv", EN.replace("°C", "°Ré").replace("(°Ré)", "[°Ré]") + R, 1, 2, "unknown unit")
bad("h-megawatt.csv", EN.replace("(W/g)", "[MW]") + R, 1, 3, "unknown unit 'MW'")
for unit in ("mV", "MW", "cal/(s g)", "J/(mol K)"):
    bad("h-signal-in-" + "".join(x for x in unit if x.isalpha()) + ".csv", EN.replace("W/g", unit) + R, 1, 3, f"unknown unit '{unit}'")
bad("h-slash-blank-unit.csv", "Time / s,Temperature / °C,Heat flow / cal/(s g)\n" + R, 1, 3, "unknown unit 'cal/(s g)'")
bad("h-slash-unit.csv", "t/s,T/°C,HF/mV\n" + R, 1, 3, "unknown unit 'mV'")
bad("h-sign-both.csv", EN.replace("endo up", "endo up exo up") + R, 1, 3, "says both")
bad("h-two-masses.csv", "Sample mass: 6.5 mg\nMass: 7 mg\n" + EN.replace("W/g", "mW") + R, 2, 0, "another sample mass than in line 1")
bad("h-mass-changes.csv", "Sample mass: 6.5 mg\n" + EN.replace("W/g", "mW") + R + "Sample mass: 7 mg\n" + EN.replace("W/g", "mW") + R, 43, 0,
    "another sample mass than in line 1")
bad("h-mass-kilogram.csv", "Sample mass: 6.5 kg\n" + EN.replace("W/g", "mW") + R, 1, 0, "does not go into a DSC")
bad("h-units-change.csv", "Time,Temperature,Heat flow endo up\ns,°C,W/g\n" + R + "Time,Temperature,Heat flow endo up\nmin,°C,W/g\n" + R, 44, 1,
    "these units differ")
bad("h-groups-differ.csv", EN.strip() + "," + EN.replace("(s)", "(min)") + "".join(f"{l},{l}\n" for l in R.split("\n")[:-1]), 1, 6,
    "choose with --signal-column")
bad("h-group-signs-differ.csv", EN.strip() + "," + EN.replace("endo", "exo") + "".join(f"{l},{l}\n" for l in R.split("\n")[:-1]), 1, 6,
    "choose with --signal-column")
bad("h-late-header.csv", "".join(",".join(r) + "\n" for _ in range(6) for r in t.rows) + EN + R, 241, 1, "a header below rows of numbers")
bad("h-two-rates.csv", "Rate: 10 K/min\nHeating rate: 20 K/min\nTemperature (°C),Heat flow endo up (W/g)\n" +
    "".join(f"{r[1]},{r[2]}\n" for r in t.rows), 2, 0, "another rate than in line 1")
bad("h-swapped-units.csv", "Time (s),Temperature,Heat flow endo up\ns,W/g,°C\n" + R, 2, 2, "is a unit of heat flow per mass, not of temperature")
bad("h-kelvin-is-celsius.csv", "Time (s),Temperature [K],Heat flow endo up (W/g)\n" + R, 2, 2, "look like °C")
bad("h-below-zero-kelvin.csv", put(10, "92.31,-300.0,0.2\n"), 12, 2, "not possible")
bad("h-far-too-hot.csv", put(10, "92.31,9999.0,0.2\n"), 12, 2, "not possible")
bad("h-huge-heat-flow.csv", put(10, "92.31,42.235,1e300\n"), 12, 3, "a heat flow of 1e+300")
bad("h-huge-time.csv", put(39, "1e300,86.85,0.3\n"), 41, 1, "a time of 1e+300")
bad("h-minutes-under-s.csv", EN + tm.text(","), 1, 1, "are they minutes")
bad("h-minutes-against-declared.csv", "Heating rate: 2 K/min\n" + EN + Table(ramp(300, 360, 2), tu="min", digits=(5, 3, 5)).text(","), 2, 1,
    "declares 2")
bad("h-time-without-point.csv", EN + "".join(L[:20]) + L[20].replace(".", "", 1) + "".join(L[21:]), 22, 1, "time jumps to 18462 and back")
bad("h-time-minus.csv", EN + "".join(L[:20]) + "-" + "".join(L[20:]), 22, 1, "time jumps to -184.62 and back")
bad("h-time-stray.csv", put(30, "200.0,73.0,0.3\n"), 32, 1, "time jumps to 200 and back")
bad("h-time-goes-back.csv", EN + "".join(L[:30] + L[27:]), 32, 1, "time goes back from 267.69 to 249.23")
bad("h-temperature-unit-open.csv", "Time (s),Temperature,Heat flow endo up (W/g)\n" + f.text(","), 1, 2, "give --temperature-unit")
bad("h-time-unit-open.csv", "Time,Temperature (°C),Heat flow endo up (W/g)\n" + Table(ramp(300, 360, 60)).text(","), 1, 1,
    "give --time-unit")
bad("h-two-signals.csv", "Temperature (°C),Heat flow 1 (W/g),Heat flow 2 (W/g)\n" +
    "".join(f"{r[1]},{r[2]},{r[2]}\n" for r in t.rows), 1, 3, "choose with --signal-column")
bad("h-two-temperatures.csv", "Time (s),Temperature 1 (°C),Temperature 2 (°C),Heat flow (W/g)\n" +
    "".join(f"{r[0]},{r[1]},{r[1]},{r[2]}\n" for r in t.rows), 1, 3, "choose with --temperature-column")
bad("h-wide-table.csv", "Temperature (°C),A1 heat flow (W/g),A2 heat flow (W/g),A3 heat flow (W/g)\n" +
    "".join(f"{r[1]},{r[2]},{r[2]},{r[2]}\n" for r in t.rows), 1, 3, "3 columns could be the heat flow")
bad("h-no-signal.csv", "Time (s),Temperature (°C),Mass (mg)\n" + R, 1, 0, "no column holds the heat flow")
bad("h-headerless-open.csv", "".join(f"{i},{i * 2},{i * 3}\n" for i in range(1, 30)), 1, 0, "no header")
bad("h-sign-contradicts.csv", "Sign: exo up\n" + EN + R, 2, 3, "line 1 says exo up")
bad("h-sign-contradicts-preamble.csv", "Sign: exo up\nSign: endo up\nTime (s),Temperature (°C),Heat flow (W/g)\n" + R, 2, 0,
    "contradicts line 1")
bad("h-header-changes.csv", EN + "".join(L[:20]) + "Time (s),Temperature (K),Heat flow endo up (W/g)\n" + "".join(L[20:]), 22, 2,
    "differs from that of line 1")
bad("h-no-such-column.csv", EN + R, 1, 0, "there is no column 'Enthalpy'", options="signal-column=Enthalpy")
bad("h-same-column.csv", EN + R, 1, 0, "one column cannot be two things", options="signal-column=2")
bad("h-bad-unit-option.csv", EN + R, 0, 0, "not a unit for --signal-unit", options="signal-unit=furlong")
bad("h-bad-mass-option.csv", EN + R, 0, 0, "not possible", options="mass=-1")
bad("h-missing-values.csv", EN + "".join(",".join([r[0], r[1], ""]) + "\n" for r in t.rows), 1, 0,
    "the header names 3 columns, the rows have 2")

with open("good.tsv", "w", encoding="utf-8") as out:
    out.write("# file\toptions\tpoints\tunit\tmass_mg\tsign\tsegments\tt0_s\tt1_s\tT0_K\tT1_K\ty0\ty1\tfacts\tmessage\n")
    out.write("\n".join(good) + "\n")
with open("hostile.tsv", "w", encoding="utf-8") as out:
    out.write("# file\toptions\tline\tcolumn\tmessage\n")
    out.write("\n".join(hostile) + "\n")
print(len(good), "good,", len(hostile), "hostile")
