//! The impedance of conductors with skin and proximity effect over their resistance to direct current.
//!
//! With p² = s τ, where τ = μ0 · size²/ρ is the time in which a field diffuses into a conductor, all laws are made
//! of two functions of one kind, g(ν, p²) = p I(ν-1, p)/I(ν, p):
//!
//! ```text
//!  sheets: Z/R = p coth p + w p tanh(p/2)       size the sheet's thickness   coth: ν = 1/2
//!  rounds: Z/R = (p/2) I0/I1 + w p I1/I0        size the radius              I0/I1: ν = 1
//! ```
//!
//! The first term is the conductor's own current (skin effect), the second the field of the others across it
//! (proximity effect) with its weight w. Each is a sum of positive partial fractions s c/(a + s τ), so that the
//! real part tells the imaginary one: the inductance here is the least that this loss allows, that of the field inside
//! the conductors. The field between them is leakage.

use crate::magnetics::MU0;
use crate::math::bessel::ratio;
use num_complex::Complex64;
use std::f64::consts::PI;

/// What conductors look like to their field.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Form {
    Sheets,
    Rounds,
}

/// Impedance over direct-current resistance, as a function of the frequency.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Impedance {
    form: Form,
    /// Diffusion time τ [s].
    time: f64,
    /// Weight of the proximity effect.
    proximity: f64,
}

/// Round conductors side by side in layers, each layer with the same current.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Layers {
    /// Number of layers, 1 or more.
    pub count: f64,
    /// Distance of neighbouring turns of a layer, centre to centre [m].
    pub pitch: f64,
}

/// Skin depth [m] at a `frequency` [Hz] in a conductor of a `resistivity` [Ω m].
pub fn skin_depth(frequency: f64, resistivity: f64) -> f64 {
    (resistivity / (PI * MU0 * frequency)).sqrt()
}

fn diffusion_time(size: f64, resistivity: f64) -> f64 {
    MU0 * size * size / resistivity
}

impl Impedance {
    /// Layers of sheet, the field zero at one side: Dowell, Proc. IEE 113 (1966) 1387 (form of the later papers:
    /// Δ (sinh 2Δ + sin 2Δ)/(cosh 2Δ - cos 2Δ) + 2 (m² - 1)/3 Δ (sinh Δ - sin Δ)/(cosh Δ + cos Δ) is its real part).
    ///
    /// `thickness` [m] of a layer; `porosity` the share of the window's breadth that it fills, its field diffusing as
    /// if the copper of that share were spread over it; `layers` 1 or more; `resistivity` [Ω m].
    pub fn sheets(thickness: f64, porosity: f64, layers: f64, resistivity: f64) -> Self {
        Impedance {
            form: Form::Sheets,
            time: porosity * diffusion_time(thickness, resistivity),
            proximity: 2.0 * (layers * layers - 1.0) / 3.0,
        }
    }

    /// Layers of round wire by Dowell's equivalent foil: thickness d √π/2 and porosity that over the pitch.
    pub fn equivalent_foil(diameter: f64, layers: Layers, resistivity: f64) -> Self {
        let thickness = 0.5 * PI.sqrt() * diameter;
        Impedance::sheets(
            thickness,
            thickness / layers.pitch,
            layers.count,
            resistivity,
        )
    }

    /// A bundle of round strands by the equivalent foil: each layer of bundles is √strands layers of strands, twisted
    /// so that all carry the same current (common practice).
    pub fn equivalent_strand_foil(
        strand: f64,
        strands: f64,
        layers: Layers,
        resistivity: f64,
    ) -> Self {
        let across = strands.sqrt();
        let finer = Layers {
            count: layers.count * across,
            pitch: layers.pitch / across,
        };
        Impedance::equivalent_foil(strand, finer, resistivity)
    }

    /// A round wire far from others, exact: Z/R = (q/2) J0(q)/J1(q) with q = (1 - j) radius/skin depth (Kelvin 1889).
    pub fn isolated(diameter: f64, resistivity: f64) -> Self {
        Impedance {
            form: Form::Rounds,
            time: diffusion_time(0.5 * diameter, resistivity),
            proximity: 0.0,
        }
    }

    /// Layers of round wire, the field zero at one side: exact for one wire in its own field and in a uniform one
    /// across it, Ferreira, IEEE Trans. Power Electron. 9 (1994) 127 (from memory; his sum of both is the real part).
    ///
    /// A wire of layer n stands in the field (n - 1/2) I/pitch, whose mean square over m layers is (4 m² - 1)/12.
    pub fn rounds(diameter: f64, layers: Layers, resistivity: f64) -> Self {
        let square = (4.0 * layers.count * layers.count - 1.0) / 12.0;
        let isolated = Impedance::isolated(diameter, resistivity);
        Impedance {
            proximity: isolated.across(diameter, square / (layers.pitch * layers.pitch)),
            ..isolated
        }
    }

    /// A bundle of `strands` round strands of diameter `strand`, twisted so that all carry the same current, of an outer
    /// diameter `bundle` [m]: as [`Impedance::rounds`] for each strand, in the field of the layers and in that of its own
    /// bundle, I r/(2π R²), whose mean square is I²/(8π² R²).
    pub fn strands(
        strand: f64,
        strands: f64,
        bundle: f64,
        layers: Layers,
        resistivity: f64,
    ) -> Self {
        let of_layers =
            (4.0 * layers.count * layers.count - 1.0) / (12.0 * layers.pitch * layers.pitch);
        let of_bundle = 1.0 / (2.0 * PI * PI * bundle * bundle);
        let isolated = Impedance::isolated(strand, resistivity);
        // Each strand has 1/strands of the current in the field of all of it.
        let proximity = isolated.across(strand, of_layers + of_bundle) * strands * strands;
        Impedance {
            proximity,
            ..isolated
        }
    }

    /// Weight of a field across round wire whose mean square is `square` [1/m²] times the wire's current squared.
    ///
    /// A cylinder of radius r in a field H has the moment 2π r² χ H per metre, χ = J2(q)/J0(q) = 2 I1/(p I0) - 1 (from memory;
    /// χ = -j (r/δ)²/4 at low frequency, -1 at high), which takes up jω μ0 2π r² (χ + 1) H² beside what is stored in
    /// it. Over ρ I²/(π r²) that is 4π² r² (H/I)² · p I1/I0.
    fn across(self, diameter: f64, square: f64) -> f64 {
        PI * PI * diameter * diameter * square
    }

    /// Z/R at a `frequency` [Hz]; 1 at zero.
    pub fn at(self, frequency: f64) -> Complex64 {
        self.normal(2.0 * PI * frequency * self.time)
    }

    /// Z/R at s τ = j `angle`.
    pub(super) fn normal(self, angle: f64) -> Complex64 {
        let square = Complex64::new(0.0, angle);
        match self.form {
            Form::Sheets => {
                // p tanh(p/2) = 2 (p/2)²/((p/2) coth(p/2)).
                let quarter = 0.25 * square;
                ratio(0.5, square) + self.proximity * 2.0 * quarter / ratio(0.5, quarter)
            }
            Form::Rounds => {
                let own = ratio(1.0, square);
                0.5 * own + self.proximity * square / own
            }
        }
    }

    /// True where both differ in the time of diffusion alone.
    pub(super) fn is_like(self, other: Impedance) -> bool {
        self.form == other.form && self.proximity == other.proximity
    }

    /// Diffusion time τ [s].
    pub fn time(self) -> f64 {
        self.time
    }

    /// s τ of the first pole: where the current begins to leave the middle of the conductors. π² for sheets, for
    /// rounds the first zero of J1 squared, of J0 where others' field counts.
    pub(super) fn first_pole(self) -> f64 {
        /// First zeros of J0 and J1, DLMF table 10.21.
        const ZEROS: [f64; 2] = [2.404_825_557_695_773, 3.831_705_970_207_512];
        match self.form {
            Form::Sheets => PI * PI,
            Form::Rounds if self.proximity > 0.0 => ZEROS[0] * ZEROS[0],
            Form::Rounds => ZEROS[1] * ZEROS[1],
        }
    }

    /// The corner [Hz]: the frequency of the first pole.
    pub fn corner(self) -> f64 {
        self.first_pole() / (2.0 * PI * self.time)
    }
}
