//! Many runs of one netlist at changing values: one pilot run serves them all, no waveform is kept, and only the
//! accounts asked for.

use super::feed::{Feed, Keeps};
use super::{Netlist, Work, method, settings, wishes};
use crate::analysis::{Account, Failure, Simulation};
use crate::dae::Ending;
use crate::limits::RatingUse;
use crate::readings;
use crate::signals::Rated;
use std::ops::ControlFlow;

/// What one such run came to, in the order of the netlist.
pub struct Figures {
    /// Readings.
    pub readings: Vec<readings::Outcome>,
    /// Ratings of all elements.
    pub ratings: Vec<RatingFigure>,
    /// The accounts that were asked for.
    pub accounts: Vec<Account>,
    /// The work that it took.
    pub work: Work,
}

/// One rating of one element.
#[derive(Clone, Copy, Debug)]
pub struct RatingFigure {
    /// Index of the element.
    pub entry: usize,
    /// Which rating.
    pub rated: Rated,
    /// How much of it is used.
    pub used: RatingUse,
}

/// The scales of all unknowns, from a quick pilot run at the values in force. They serve every run whose swings are
/// of that order.
///
/// # Errors
/// A pilot run that could not be completed.
pub fn pilot(netlist: &Netlist) -> Result<Vec<f64>, Failure> {
    match simulation(netlist)? {
        Some(simulation) => simulation.pilot(wishes(netlist)),
        None => Ok(Vec::new()),
    }
}

/// Runs a transient at the values in force with known scales. `accounts` are the elements whose energy is counted;
/// `watch` is told the simulated time [s] and may stop it.
///
/// # Errors
/// A simulation that could not be completed, or was stopped.
///
/// # Panics
/// Where the netlist's analysis is no transient: the caller has written it.
pub fn again(
    netlist: &Netlist,
    scales: &[f64],
    accounts: &[usize],
    watch: &mut dyn FnMut(f64) -> ControlFlow<()>,
) -> Result<Figures, Failure> {
    let simulation = simulation(netlist)?.expect("only a run over time is repeated");
    figures(netlist, &simulation, scales, accounts, watch)
}

/// The figures of one simulation of a netlist.
pub(super) fn figures(
    netlist: &Netlist,
    simulation: &Simulation<'_>,
    scales: &[f64],
    accounts: &[usize],
    watch: &mut dyn FnMut(f64) -> ControlFlow<()>,
) -> Result<Figures, Failure> {
    let keeps = Keeps {
        waveforms: None,
        accounts: Some(accounts),
        pieces: 1,
    };
    let mut feed = Feed::new(netlist, keeps);
    let (counted, ending) = simulation.run_scaled(scales, &mut |circuit, shown, log| {
        watch(feed.take(circuit, shown, log))
    })?;
    if ending == Ending::Stopped {
        return Err(Failure::Interrupted);
    }
    Ok(feed.figures(&netlist.circuit, Work { counted, ending }))
}

fn simulation(netlist: &Netlist) -> Result<Option<Simulation<'_>>, Failure> {
    let simulation = |settings| Simulation {
        circuit: &netlist.circuit,
        settings,
        method: method(),
        warm: None,
    };
    Ok(settings(netlist)?.map(simulation))
}
