//! Guards: a chart becomes a picture that a person can read, whatever stands in it. Each test leaves its pictures in
//! `target/tmp/plots`, to be looked at.

use std::f64::consts::TAU;
use std::fs;
use std::path::Path;

use coilbreak::report::chart::{
    Axis, Bar, BarPanel, Chart, Curve, CurvePanel, Instant, LimitLine, Mark, Panel, Size, Style,
};
use coilbreak::report::plots;

/// Paints a chart both ways, keeps the pictures, and returns the SVG after checks that hold for every picture.
fn painted(name: &str, chart: &Chart, size: Size) -> String {
    let svg = plots::svg(chart, size).expect("an SVG");
    let png = plots::png(chart, size).expect("a PNG");
    assert!(png.starts_with(b"\x89PNG\r\n\x1a\n"));
    assert!(svg.starts_with("<svg ") && svg.trim_end().ends_with("</svg>"));
    assert!(
        !svg.contains("NaN") && !svg.contains("inf"),
        "{name}: a figure without a value reached the picture"
    );
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("plots");
    fs::create_dir_all(&folder).expect("a folder for pictures");
    fs::write(folder.join(format!("{name}.svg")), &svg).expect("written");
    fs::write(folder.join(format!("{name}.png")), png).expect("written");
    svg
}

/// Voltage at a low-side switch that interrupts an unsuppressed coil: supply, then a damped ring about it whose
/// amplitude is I sqrt(L/C), with L = 2.4 H, C = 1 nF and I = 60 mA lowered by what the damping takes.
fn kick(time: f64) -> f64 {
    match time {
        t if t < 0.0 => 0.02,
        t => {
            24.0 + 2939.0 * (-t / 600e-6).exp() * (TAU * t / 308e-6).sin()
                - 24.0 * (-t / 1e-6).exp()
        }
    }
}

fn sampled(from: f64, to: f64, count: usize, law: impl Fn(f64) -> f64) -> Vec<(f64, f64)> {
    (0..count)
        .map(|k| from + (to - from) * k as f64 / (count - 1) as f64)
        .map(|t| (t, law(t)))
        .collect()
}

fn highest(points: &[(f64, f64)]) -> (f64, f64) {
    points
        .iter()
        .copied()
        .max_by(|a, b| a.1.total_cmp(&b.1))
        .expect("points")
}

fn curve(name: &str, points: Vec<(f64, f64)>) -> Curve {
    Curve {
        name: name.to_string(),
        points,
        style: Style::Line,
    }
}

fn limit(label: &str, value: f64) -> LimitLine {
    LimitLine {
        label: label.to_string(),
        value,
    }
}

fn kick_chart() -> Chart {
    let time = Axis::new("time after k1_driver opens", "s").between(-50e-6, 2e-3);
    let opening = vec![Instant {
        label: "k1_driver opens".to_string(),
        at: 0.0,
    }];
    let voltage = sampled(-1e-3, 4e-3, 100_000, kick);
    let current = sampled(-1e-3, 4e-3, 20_000, |t| {
        if t < 0.0 {
            0.06
        } else {
            0.06 * (-t / 600e-6).exp() * (TAU * t / 308e-6).cos()
        }
    });
    let peak = highest(&voltage);
    let label = format!("peak {:.2} kV after {:.0} µs", peak.1 / 1e3, peak.0 * 1e6);
    Chart {
        title: "Sluice relay K1 on a low-side driver: the kick at its switch".to_string(),
        subtitle: "The switch sees 2.62 kV against its limit of 60 V: the limit does not hold (margin −4270 %), set by \
                   the rated voltage of k1_driver"
            .to_string(),
        panels: vec![
            Panel::Curves(CurvePanel {
                x: time.clone(),
                y: Axis::new("voltage at drive", "V"),
                curves: vec![curve("voltage at drive", voltage)],
                limits: vec![limit("driver_voltage at most 60 V", 60.0)],
                instants: opening.clone(),
                marks: vec![Mark { x: peak.0, y: peak.1, label }],
            }),
            Panel::Curves(CurvePanel {
                x: time,
                y: Axis::new("winding current of k1_coil", "A"),
                curves: vec![curve("winding current of k1_coil", current)],
                limits: vec![limit("release at 8 mA", 8e-3)],
                instants: opening,
                marks: Vec::new(),
            }),
        ],
        caution: Some(
            "k1_driver has no breakdown in this model, so the peak is what the stray capacitance alone allows; figures \
             are predictions, to be confirmed on the bench with rated probes."
                .to_string(),
        ),
    }
}

#[test]
fn the_kick_has_its_units_its_limit_and_its_peak() {
    let svg = painted("kick", &kick_chart(), Size::default());
    for text in [
        "voltage at drive [kV]",
        "time after k1_driver opens [ms]",
        "driver_voltage",
        "peak 2.62 kV",
        "release at 8 mA",
    ] {
        assert!(svg.contains(text), "{text} is missing");
    }
    assert!(
        svg.len() < 400_000,
        "a hundred thousand points are thinned: {} bytes",
        svg.len()
    );
}

#[test]
fn the_same_chart_gives_the_same_bytes() {
    let (chart, size) = (kick_chart(), Size::default());
    assert_eq!(
        plots::svg(&chart, size).expect("an SVG"),
        plots::svg(&chart, size).expect("an SVG")
    );
    assert_eq!(
        plots::png(&chart, size).expect("a PNG"),
        plots::png(&chart, size).expect("a PNG")
    );
}

/// Clamped releases: the voltage is held while the current falls on a straight line, then both end.
fn candidates() -> Chart {
    let held = [
        ("flyback diode", 24.8, 24e-3),
        ("diode with 220 Ω", 38.0, 14e-3),
        ("diode and zener 24 V", 49.0, 6.4e-3),
        ("suppressor diode across the switch", 53.0, 5.1e-3),
        ("RC snubber 100 Ω, 470 nF", 88.0, 3.9e-3),
        ("nothing", 412.0, 0.9e-3),
    ];
    let time = Axis::new("time after k1_driver opens", "s").between(-2e-3, 30e-3);
    let voltage = |clamp: f64, release: f64| {
        sampled(-2e-3, 30e-3, 4000, move |t| match t {
            t if t < 0.0 => 0.02,
            t if t < release => clamp,
            t => 24.0 + (clamp - 24.0) * (-(t - release) / 0.4e-3).exp(),
        })
    };
    let current = |release: f64| {
        sampled(-2e-3, 30e-3, 4000, move |t| {
            0.06 * (1.0 - t.max(0.0) / release).max(0.0).powf(1.2)
        })
    };
    Chart {
        title: "Suppressors for K1 side by side".to_string(),
        subtitle: "Recommended: diode and zener 24 V; release 6.4 ms, switch 49 V, every limit holds with margin".to_string(),
        panels: vec![
            Panel::Curves(CurvePanel {
                x: time.clone(),
                y: Axis::new("voltage across k1_driver", "V").between(-10.0, 120.0),
                curves: held.iter().map(|&(name, clamp, release)| curve(name, voltage(clamp, release))).collect(),
                limits: vec![limit("driver_voltage at most 60 V", 60.0)],
                ..CurvePanel::default()
            }),
            Panel::Curves(CurvePanel {
                x: time,
                y: Axis::new("winding current of k1_coil", "A"),
                curves: held.iter().map(|&(name, _, release)| curve(name, current(release))).collect(),
                limits: vec![limit("release at 8 mA", 8e-3)],
                instants: vec![Instant { label: "released within 25 ms".to_string(), at: 25e-3 }],
                marks: vec![Mark { x: 6.4e-3, y: 0.0, label: "released after 6.4 ms".to_string() }],
            }),
        ],
        caution: None,
    }
}

#[test]
fn candidates_lie_over_each_other_with_their_names() {
    let svg = painted("candidates", &candidates(), Size::default());
    assert!(svg.contains("flyback diode") && svg.contains("RC snubber"));
    assert!(!svg.contains("… more"));
}

/// Three quantities over one time axis, one limit far outside: what a run leaves for a coil near its knee.
#[test]
fn a_run_shows_voltage_current_and_flux_over_one_axis() {
    let time = || Axis::new("time", "s").between(0.0, 60e-3);
    let rise = |t: f64| 1.0 - (-t / 6e-3).exp();
    let current = sampled(0.0, 60e-3, 3000, |t| {
        if t < 20e-3 {
            0.06 * rise(t)
        } else {
            0.06 * rise(20e-3) * (-(t - 20e-3) / 9e-3).exp()
        }
    });
    let flux: Vec<(f64, f64)> = current
        .iter()
        .map(|&(t, i)| (t, 1.1 * (i / 0.025).tanh()))
        .collect();
    let voltage = sampled(0.0, 60e-3, 3000, |t| {
        if t < 20e-3 {
            0.006
        } else {
            24.0 + 0.8 * (-(t - 20e-3) / 30e-3).exp()
        }
    });
    let released = current
        .iter()
        .copied()
        .rfind(|&(_, i)| i > 8e-3)
        .expect("it was above");
    let peak = highest(&voltage);
    let opens = || {
        vec![Instant {
            label: "k1_driver opens".to_string(),
            at: 20e-3,
        }]
    };
    let panel = |label: &str, unit: &str, points, limits, marks| {
        Panel::Curves(CurvePanel {
            x: time(),
            y: Axis::new(label, unit),
            curves: vec![curve(label, points)],
            limits,
            instants: opens(),
            marks,
        })
    };
    let mark = |(x, y): (f64, f64), label: &str| {
        vec![Mark {
            x,
            y,
            label: label.to_string(),
        }]
    };
    let chart = Chart {
        title: "Sluice relay K1 with a flyback diode".to_string(),
        subtitle: "driver_voltage 24.8 V of 60 V: holds, margin +59 % of 20 % asked".to_string(),
        panels: vec![
            panel(
                "voltage at drive",
                "V",
                voltage,
                vec![limit("rated 600 V", 600.0)],
                mark(peak, "peak 24.8 V at 20 ms"),
            ),
            panel(
                "winding current of k1_coil",
                "A",
                current,
                vec![limit("release at 8 mA", 8e-3)],
                mark(released, "released after 17.1 ms"),
            ),
            panel(
                "flux density in k1_coil",
                "T",
                flux,
                vec![limit("saturation 1.5 T", 1.5)],
                Vec::new(),
            ),
        ],
        caution: Some(
            "The release is taken from the current alone; the armature adds to it.".to_string(),
        ),
    };
    let svg = painted("run", &chart, Size::default());
    assert!(
        svg.contains("↑ rated 600 V"),
        "a limit that would hide the curve is named at the edge"
    );
    assert_eq!(
        svg.matches("time [ms]").count(),
        1,
        "panels over one axis share its heading"
    );
    assert_eq!(
        svg.matches("k1_driver opens").count(),
        1,
        "and the names of its instants"
    );
}

#[test]
fn bars_show_where_the_energy_went() {
    let bar = |name: &str, value: f64| Bar {
        name: name.to_string(),
        value,
    };
    let bars = vec![
        bar("supply", -14.32e-3),
        bar("k1_coil (winding resistance)", 12.1e-3),
        bar("catch", 2.21e-3),
        bar("k1_driver", 1.2e-6),
        bar("snubber_capacitor", 0.0),
        bar(
            "a part whose name somebody made very long indeed, longer than any drawing would bear",
            9.1e-5,
        ),
        bar("never computed", f64::NAN),
    ];
    let panel = BarPanel {
        label: "energy absorbed".to_string(),
        unit: "J".to_string(),
        bars,
    };
    let chart = Chart {
        title: "Where the energy went".to_string(),
        subtitle: "Imbalance 2.1·10⁻⁵ of what moved".to_string(),
        panels: vec![Panel::Bars(panel)],
        caution: None,
    };
    let svg = painted(
        "energy",
        &chart,
        Size {
            width: 1000,
            height: 420,
        },
    );
    for text in [
        "−14.3 mJ",
        "2.21 mJ",
        "1.2 µJ",
        "0 J",
        "—",
        "energy absorbed [mJ]",
    ] {
        assert!(svg.contains(text), "{text} is missing");
    }
}

#[test]
fn logarithmic_axes_spectra_samples_and_steps() {
    let resistance = Axis::new("series resistance of catch", "Ω").logarithmic();
    let sweep = |law: fn(f64) -> f64| {
        (0..=40)
            .map(|k| 10f64.powf(f64::from(k) / 10.0))
            .map(|r| (r, law(r)))
            .collect()
    };
    let samples = (0..300).map(|k: u32| {
        let share = f64::from(k.wrapping_mul(2_654_435_761)) / f64::from(u32::MAX);
        (
            10f64.powf(4.0 * share),
            0.004 + 0.002 * (17.0 * share).sin(),
        )
    });
    let harmonics = (1..=40)
        .map(|k| {
            (
                f64::from(k) * 50e3,
                0.8 / f64::from(k * k) * f64::from(k % 2 + 1),
            )
        })
        .collect();
    let shares = vec![
        (10e-3, 0.0),
        (12e-3, 3.0),
        (14e-3, 41.0),
        (16e-3, 112.0),
        (18e-3, 80.0),
        (20e-3, 20.0),
        (22e-3, 0.0),
    ];
    let panel = |x: Axis, y: Axis, curve: Curve| {
        Panel::Curves(CurvePanel {
            x,
            y,
            curves: vec![curve],
            ..CurvePanel::default()
        })
    };
    let styled = |name: &str, points, style| Curve {
        name: name.to_string(),
        points,
        style,
    };
    let chart = Chart {
        title: "Axes of other kinds".to_string(),
        panels: vec![
            panel(
                resistance.clone(),
                Axis::new("peak voltage", "V").logarithmic(),
                styled("peak", sweep(|r| 24.0 + 0.06 * r), Style::Line),
            ),
            panel(
                resistance,
                Axis::new("release", "s"),
                styled("samples", samples.collect(), Style::Points),
            ),
            panel(
                Axis::new("frequency", "Hz"),
                Axis::new("ripple current", "A"),
                styled("l1", harmonics, Style::Stems),
            ),
            panel(
                Axis::new("release time", "s"),
                Axis::new("samples", ""),
                styled("count", shares, Style::Steps),
            ),
        ],
        ..Chart::default()
    };
    let svg = painted(
        "axes",
        &chart,
        Size {
            width: 1200,
            height: 1000,
        },
    );
    for text in ["1 kΩ", "10 kΩ", "frequency [MHz]", "release [ms]"] {
        assert!(svg.contains(text), "{text} is missing");
    }
}

#[test]
fn odd_data_make_a_sound_picture() {
    let line = |name: &str, y: Axis, points: Vec<(f64, f64)>| {
        Panel::Curves(CurvePanel {
            x: Axis::new(name, "s"),
            y,
            curves: vec![curve(name, points)],
            ..CurvePanel::default()
        })
    };
    let volts = || Axis::new("voltage at a node", "V");
    let gaps = sampled(0.0, 1.0, 1000, |t| {
        if (0.3..0.5).contains(&t) {
            f64::NAN
        } else {
            (9.0 * t).sin()
        }
    });
    let ripple = sampled(0.02, 0.020_02, 500, |t| {
        5.6 + 0.0045 * (TAU * t / 5e-6).sin()
    });
    let chart = Chart {
        title: "Odd data".to_string(),
        subtitle: String::new(),
        panels: vec![
            line("constant", volts(), sampled(0.0, 1.0, 50, |_| 5.0)),
            line("one point", volts(), vec![(1e-3, 24.0)]),
            line("empty", volts(), Vec::new()),
            line("gaps", volts(), gaps),
            line("ripple", volts(), ripple),
            line(
                "huge range",
                volts(),
                vec![(0.0, 1e-15), (1e-15, 1.0), (1e15, 1e15)],
            ),
            line(
                "not finite",
                volts(),
                vec![
                    (0.0, f64::INFINITY),
                    (f64::NAN, 1.0),
                    (1.0, f64::NEG_INFINITY),
                ],
            ),
            line(
                "largest",
                volts(),
                vec![
                    (0.0, f64::MAX),
                    (1.0, f64::MIN),
                    (2.0, 5e-324),
                    (3.0, -1e149),
                ],
            ),
            Panel::Curves(CurvePanel::default()),
            Panel::Bars(BarPanel::default()),
        ],
        caution: None,
    };
    let svg = painted(
        "odd",
        &chart,
        Size {
            width: 1000,
            height: 1800,
        },
    );
    assert!(svg.contains("time, less") || svg.contains("ripple, less 20 ms [µs]"));
    for size in [
        Size {
            width: 0,
            height: 0,
        },
        Size {
            width: 320,
            height: 200,
        },
    ] {
        painted("odd_small", &chart, size);
    }
    painted("nothing", &Chart::default(), Size::default());
}

#[test]
fn hostile_names_stay_text() {
    let evil = "</text><script>alert('\"&')</script>\u{0}\u{202e}\n]]>".repeat(40);
    let ramp = || vec![(0.0, 0.0), (1.0, 1.0)];
    let panel = CurvePanel {
        x: Axis::new(&evil, &evil),
        y: Axis::new(&evil, &evil),
        curves: (0..60)
            .map(|k| curve(&format!("{k} {evil}"), ramp()))
            .collect(),
        limits: vec![limit(&evil, 0.5), limit(&evil, f64::NAN)],
        instants: vec![
            Instant {
                label: evil.clone(),
                at: 0.5,
            },
            Instant {
                label: evil.clone(),
                at: 0.51,
            },
        ],
        marks: (0..12)
            .map(|k| Mark {
                x: f64::from(k) / 12.0,
                y: 0.5,
                label: evil.clone(),
            })
            .collect(),
    };
    let bars = BarPanel {
        label: evil.clone(),
        unit: evil.clone(),
        bars: vec![Bar {
            name: evil.clone(),
            value: 1.0,
        }],
    };
    let chart = Chart {
        title: evil.clone(),
        subtitle: evil.clone(),
        panels: vec![Panel::Curves(panel), Panel::Bars(bars)],
        caution: Some(evil),
    };
    let svg = painted("hostile", &chart, Size::default());
    assert!(
        !svg.contains("<script")
            && !svg.contains("]]>")
            && !svg.contains('\u{202e}')
            && !svg.contains('\u{0}')
    );
    let opened = svg.matches("<text ").count();
    assert_eq!(opened, svg.matches("</text>").count());
}

/// A converter's run: edges by the thousand, a dense ring on broken lines, a cloud of samples.
#[test]
fn crowds_stay_small_and_readable() {
    let edges = (0..2000).map(|k| Instant {
        label: format!("q1 closes {k}"),
        at: f64::from(k) * 1e-5,
    });
    let ring = |phase: f64| sampled(0.0, 20e-3, 10_000, move |t| (3e6 * t + phase).sin());
    let cloud = sampled(0.0, 20e-3, 50_000, |t| (9e9 * t).sin());
    let panel = CurvePanel {
        x: Axis::new("time", "s"),
        y: Axis::new("inductor current", "A"),
        curves: (0..7)
            .map(|k| curve(&format!("l{k}"), ring(f64::from(k))))
            .collect(),
        instants: edges.collect(),
        ..CurvePanel::default()
    };
    let samples = CurvePanel {
        x: Axis::new("sample", "s"),
        y: Axis::new("ripple", "V"),
        curves: vec![Curve {
            name: "samples".to_string(),
            points: cloud,
            style: Style::Points,
        }],
        ..CurvePanel::default()
    };
    let chart = Chart {
        title: "Crowds".to_string(),
        panels: vec![Panel::Curves(panel), Panel::Curves(samples)],
        ..Chart::default()
    };
    let svg = painted("crowds", &chart, Size::default());
    assert!(
        svg.contains("2000 instants"),
        "instants without room are counted"
    );
    assert!(svg.len() < 8_000_000, "{} bytes", svg.len());
}
