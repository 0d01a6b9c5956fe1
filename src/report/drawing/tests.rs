//! Guards: on a page no text lies on another, none leaves the page, and no shape leaves it either.

use super::shapes::{Anchor, Drawing, Rect, Shape, Text};
use super::text::Measure;
use super::{Ink, lay_out};
use crate::report::chart::{
    Axis, Bar, BarPanel, Chart, Curve, CurvePanel, Instant, LimitLine, Mark, Panel, Size, Style,
};
use crate::report::plots::font::Embedded;

/// A fixed sequence of numbers from 0 to 1 (a linear congruence).
struct Numbers(u64);

impl Numbers {
    fn next(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 33) as f64 / f64::from(1_u32 << 31)
    }

    fn below(&mut self, count: usize) -> usize {
        (self.next() * count as f64) as usize
    }

    fn name(&mut self) -> String {
        const WORDS: [&str; 8] = [
            "winding",
            "current of",
            "k1_coil",
            "suppressor",
            "470 nF",
            "voltage",
            "Ω",
            "at_the_drive_node",
        ];
        let count = 1 + self.below(5);
        (0..count)
            .map(|_| WORDS[self.below(WORDS.len())])
            .collect::<Vec<_>>()
            .join(" ")
    }

    fn value(&mut self) -> f64 {
        (self.next() - 0.4) * 10f64.powf(12.0 * self.next() - 6.0)
    }
}

/// The box of a text's letters, a little inside of their line, so that neighbouring lines do not meet.
fn box_of(text: &Text, measure: &dyn Measure) -> Rect {
    let width = measure.width(&text.text, text.font);
    let start = match text.anchor {
        Anchor::Start => 0.0,
        Anchor::Middle => -width / 2.0,
        Anchor::End => -width,
    };
    let (x, y) = text.at;
    let (up, down) = (0.74 * text.font.size, 0.2 * text.font.size);
    match text.upwards {
        false => Rect {
            left: x + start,
            right: x + start + width,
            top: y - up,
            bottom: y + down,
        },
        true => Rect {
            left: x - up,
            right: x + down,
            top: y - start - width,
            bottom: y - start,
        },
    }
}

fn check(drawing: &Drawing, measure: &dyn Measure, what: &str) {
    let page = Rect {
        left: 0.0,
        top: 0.0,
        right: drawing.width,
        bottom: drawing.height,
    };
    let mut boxes: Vec<(Rect, &str)> = Vec::new();
    for shape in &drawing.shapes {
        match shape {
            Shape::Text(text) => {
                let place = box_of(text, measure);
                assert!(
                    page.holds(&place),
                    "{what}: `{}` leaves the page: {place:?}",
                    text.text
                );
                for (other, name) in &boxes {
                    assert!(
                        !other.meets(&place),
                        "{what}: `{}` lies on `{name}`",
                        text.text
                    );
                }
                boxes.push((place, &text.text));
            }
            Shape::Line { points, .. } => {
                assert!(points.iter().all(|&(x, y)| page.grown(1.0).holds(&Rect {
                    left: x,
                    right: x,
                    top: y,
                    bottom: y
                })));
            }
            Shape::Area {
                rect,
                ink: Ink { opacity, .. },
            } => assert!(*opacity < 1.0 || page.grown(3.0).holds(rect)),
            Shape::Disc { centre, radius, .. } => {
                assert!(centre.0.is_finite() && centre.1.is_finite() && *radius > 0.0)
            }
        }
    }
}

fn curve_panel(numbers: &mut Numbers) -> CurvePanel {
    let (size, offset) = (
        numbers.value(),
        if numbers.next() < 0.3 {
            numbers.value()
        } else {
            0.0
        },
    );
    let (start, length) = (numbers.value(), numbers.value().abs() + 1e-9);
    let curves = (0..numbers.below(8)).map(|_| {
        let (phase, decay) = (6.0 * numbers.next(), 5.0 * numbers.next());
        let law = |t: f64| offset + size * (-decay * t).exp() * (25.0 * t + phase).cos();
        let points: Vec<(f64, f64)> = (0..300)
            .map(|k| f64::from(k) / 299.0)
            .map(|t| (start + t * length, law(t)))
            .collect();
        let style = [
            Style::Line,
            Style::Dashed,
            Style::Points,
            Style::Stems,
            Style::Steps,
        ][numbers.below(5)];
        Curve {
            name: numbers.name(),
            points,
            style,
        }
    });
    let curves: Vec<Curve> = curves.collect();
    let marks = curves
        .iter()
        .take(2)
        .map(|curve| (curve.points[numbers.below(300)], numbers.name()));
    let marks = marks
        .map(|((x, y), label)| Mark {
            x,
            y,
            label: label.chars().take(30).collect(),
        })
        .collect();
    let limits = (0..numbers.below(3)).map(|_| LimitLine {
        label: numbers.name(),
        value: offset + 2.0 * size * numbers.next(),
    });
    let limits = limits.collect();
    let instants = (0..numbers.below(4)).map(|_| Instant {
        label: numbers.name(),
        at: start + length * numbers.next(),
    });
    let instants = instants.collect();
    CurvePanel {
        x: Axis::new("time", "s"),
        y: Axis::new(&numbers.name(), "V"),
        curves,
        limits,
        instants,
        marks,
    }
}

fn bar_panel(numbers: &mut Numbers) -> BarPanel {
    let bars = (0..numbers.below(20))
        .map(|_| Bar {
            name: numbers.name(),
            value: numbers.value(),
        })
        .collect();
    BarPanel {
        label: numbers.name(),
        unit: "J".to_string(),
        bars,
    }
}

#[test]
fn no_text_lies_on_another_and_none_leaves_the_page() {
    let measure = Embedded::get().expect("the font is whole");
    let mut numbers = Numbers(1);
    for round in 0..150 {
        let panels = (0..1 + numbers.below(4)).map(|_| match numbers.below(4) {
            0 => Panel::Bars(bar_panel(&mut numbers)),
            _ => Panel::Curves(curve_panel(&mut numbers)),
        });
        let chart = Chart {
            panels: panels.collect(),
            title: numbers.name(),
            subtitle: (0..numbers.below(5))
                .map(|_| numbers.name())
                .collect::<Vec<_>>()
                .join(", "),
            caution: (numbers.next() < 0.5).then(|| {
                (0..4)
                    .map(|_| numbers.name())
                    .collect::<Vec<_>>()
                    .join("; ")
            }),
        };
        let size = Size {
            width: 800 + numbers.below(800) as u32,
            height: 500 + numbers.below(700) as u32,
        };
        check(
            &lay_out(&chart, size, &measure),
            &measure,
            &format!("round {round}, {size:?}"),
        );
    }
}
