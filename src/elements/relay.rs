//! Relay or solenoid: a coil whose core has a gap that an armature closes, and contacts that the armature moves.
//!
//! The gap x adds x/(mu0 A) to the path's reluctance, A the core's effective area, without fringing; a `gap` of the core
//! itself stays where it is (a hinge, a shim). A `yoke` has its own law instead, with fringing, leakage and hinge; the gap it is
//! drawn with gives way to the armature's, its residual gap stays. The pull is the field's energy's slope at constant flux,
//! flux²/2 dR/dx; that the armature moves shows in the winding by itself, since the state is the flux linkage.

use super::armature::{self, Armature};
use super::claims::{Claims, Wanted};
use super::coil::{Coil, SELF_CAPACITANCE};
use super::element::{
    Element, Energy, Happening, Path, PathKind, Point, Quantity, Switching, Unknown, Unsound,
    WindingFigures,
};
use super::kind::{ElementKind, Made, NODES, Surroundings};
use super::relay_contact::{self, RelayContact};
use super::stamper::Stamper;
use super::winding::{
    LAYER_BREADTH, LAYERS, RESISTANCE, SKIN_AND_PROXIMITY, TEMPERATURE_COEFFICIENT, TURNS, WIRE,
};
use crate::netlist::{Fields, Key, Takes, Values};

/// The kind.
pub const KIND: ElementKind = ElementKind {
    word: "relay",
    about: "A coil that pulls an armature in, with contacts that the armature moves.",
    keys: &[
        NODES,
        Key::required("core", Takes::Name("core"), "the core that it is wound on"),
        TURNS,
        WIRE,
        RESISTANCE,
        SELF_CAPACITANCE,
        TEMPERATURE_COEFFICIENT,
        SKIN_AND_PROXIMITY,
        LAYERS,
        LAYER_BREADTH,
        Key::required(
            "armature",
            Takes::Map(armature::KEYS),
            "what the pull moves",
        ),
        Key::default(
            "initially",
            Takes::Word(&["open", "seated"]),
            "open",
            "where the armature is at the start, unless it cannot stay there",
        ),
        Key::optional(
            "contacts",
            Takes::Other("a mapping of names to contacts"),
            "contacts that the armature opens and closes",
        ),
    ],
    read,
};

struct Relay {
    coil: Coil,
    armature: Armature,
    contacts: Vec<RelayContact>,
}

fn read(fields: &Fields<'_>, around: &Surroundings<'_>) -> Option<Made> {
    let coil = Coil::read(fields, around, true);
    let seated = fields.word("initially").map(|word| word == "seated");
    let armature = fields
        .map("armature")
        .and_then(|map| Armature::read(&map, seated == Some(true)));
    let mut windings = vec![String::new()];
    let mut contacts = Some(Vec::new());
    if fields.has("contacts") {
        for named in fields.entries("contacts") {
            windings.push(named.name.text.clone());
            let map = fields.inside(&named, relay_contact::KEYS);
            let read = RelayContact::read(&named.name.text, &map, around);
            contacts = contacts.zip(read).map(|(mut all, one)| {
                all.push(one);
                all
            });
        }
    }
    let (mut terminals, coil) = coil?;
    let (of_contacts, contacts): (Vec<_>, Vec<_>) = contacts?.into_iter().unzip();
    terminals.extend(of_contacts.into_iter().flatten());
    seated?;
    let element = Relay {
        coil,
        armature: armature?,
        contacts,
    };
    Some(Made {
        terminals,
        windings,
        element: Box::new(element),
    })
}

/// The modes of contact `k` among the element's own, behind those of the armature.
fn contact_modes(k: usize) -> std::ops::Range<usize> {
    let first = armature::MODES + k * relay_contact::MODES;
    first..first + relay_contact::MODES
}

impl Relay {
    fn of_armature<'a>(&self, at: Point<'a>) -> Point<'a> {
        Point {
            mode: &at.mode[..armature::MODES],
            ..at
        }
    }

    fn of_contact<'a>(&self, k: usize, at: Point<'a>) -> Point<'a> {
        Point {
            mode: &at.mode[contact_modes(k)],
            ..at
        }
    }

    fn each_contact<'a>(
        &'a self,
        at: Point<'a>,
    ) -> impl Iterator<Item = (&'a RelayContact, Point<'a>)> {
        let contacts = self.contacts.iter().enumerate();
        contacts.map(move |(k, contact)| (contact, self.of_contact(k, at)))
    }

    fn pull(&self, x: &[f64]) -> f64 {
        self.coil.leg.pull(x).value
    }
}

impl Element for Relay {
    fn derive(&mut self, values: &Values) -> Result<(), Unsound> {
        self.armature.derive(values)?;
        let stops = self.armature.stops();
        self.coil.derive_around(values, Some(stops.0))?;
        for contact in &mut self.contacts {
            contact.derive(values, stops)?;
        }
        Ok(())
    }

    fn claim(&mut self, claims: &mut Claims<'_>) {
        self.armature.claim(claims);
        claims.modes(armature::MODES);
        claims.guards(armature::GUARDS);
        let gap = self.armature.gap;
        self.coil.claim_around(claims, Some(gap));
        claims.offer(Wanted::Of(Quantity::Position, 0), gap, 1.0);
        for (k, contact) in self.contacts.iter_mut().enumerate() {
            contact.claim(claims, 2 * (k + 1), gap);
        }
    }

    fn stamp(&self, at: Point<'_>, into: &mut Stamper<'_>) {
        self.coil.stamp(at, into);
        let leg = &self.coil.leg;
        self.armature.stamp(
            self.of_armature(at),
            leg.pull(at.x),
            (leg.terms(), self.coil.turns),
            into,
        );
        for (contact, at) in self.each_contact(at) {
            contact.stamp(at, into);
        }
    }

    fn energy(&self) -> &dyn Energy {
        self
    }

    fn switching(&self) -> Option<&dyn Switching> {
        Some(self)
    }

    fn quantity(&self, quantity: Quantity, winding: usize, at: Point<'_>) -> Option<f64> {
        match quantity {
            _ if winding != 0 => None,
            Quantity::Position => Some(self.armature.gap.of(at.x)),
            Quantity::Pull => Some(self.pull(at.x)),
            _ => self.coil.quantity(quantity, 0, at),
        }
    }

    fn initial_charge(&self, q: &mut dyn FnMut(Unknown, f64)) {
        let (seated, open) = self.armature.stops();
        let mut mode = [0.0; armature::MODES];
        self.armature.start(&mut mode);
        let at_seat = self.armature.is_seated(&mode);
        q(self.armature.gap, if at_seat { seated } else { open });
        self.coil.initial_charge(q);
    }

    fn paths(&self) -> Vec<Path> {
        let mut paths = self.coil.paths();
        paths.extend((1..=self.contacts.len()).map(|k| Path {
            from: 2 * k,
            to: 2 * k + 1,
            kind: PathKind::Conductive,
        }));
        paths
    }

    fn windings(&self) -> Vec<WindingFigures<'_>> {
        self.coil.windings()
    }
}

impl Energy for Relay {
    fn currents(&self, at: Point<'_>, out: &mut [f64]) {
        let (coil, contacts) = out.split_at_mut(2);
        self.coil.currents(at, coil);
        for ((contact, at), out) in self.each_contact(at).zip(contacts.chunks_exact_mut(2)) {
            let current = contact.through(at);
            (out[0], out[1]) = (current, -current);
        }
    }

    fn loss(&self, at: Point<'_>) -> f64 {
        let contacts: f64 = self.each_contact(at).map(|(c, at)| c.loss(at)).sum();
        self.coil.loss(at) + self.armature.loss(at.x) + contacts
    }

    fn stored(&self, at: Point<'_>) -> f64 {
        let contacts: f64 = self.each_contact(at).map(|(c, at)| c.stored(at)).sum();
        self.coil.stored(at) + self.armature.stored(at.x) + contacts
    }

    fn struck(&self, before: &[f64], after: &[f64]) -> f64 {
        self.armature.struck(before, after)
    }
}

impl Switching for Relay {
    fn start(&self, mode: &mut [f64]) {
        self.armature.start(&mut mode[..armature::MODES]);
        let seated = self.armature.is_seated(mode);
        for (k, contact) in self.contacts.iter().enumerate() {
            contact.at_rest(seated, &mut mode[contact_modes(k)]);
        }
    }

    fn forever(&self, _time: f64, mode: &mut [f64]) {
        Armature::sets_out(mode);
    }

    fn earlier(&self, by: f64, mode: &mut [f64]) {
        for (k, contact) in self.contacts.iter().enumerate() {
            contact.earlier(by, &mut mode[contact_modes(k)]);
        }
    }

    fn next_event(&self, time: f64, mode: &[f64]) -> f64 {
        // A start is looked for before time zero, and over then.
        let settled = if Armature::settles(mode) && time < 0.0 {
            0.0
        } else {
            f64::INFINITY
        };
        let contacts = self.contacts.iter().enumerate();
        contacts
            .map(|(k, contact)| contact.next(time, &mode[contact_modes(k)]))
            .fold(settled, f64::min)
    }

    fn at_instant(&self, time: f64, mode: &mut [f64]) -> Option<Happening> {
        if time == 0.0 {
            Armature::sets_out(mode);
        }
        for (k, contact) in self.contacts.iter().enumerate() {
            contact.change(time, &mut mode[contact_modes(k)]);
        }
        None
    }

    fn guards(&self, at: Point<'_>, out: &mut [f64]) {
        let (own, mut rest) = out.split_at_mut(armature::GUARDS);
        self.armature
            .guards(self.of_armature(at), self.pull(at.x), own);
        for (contact, at) in self.each_contact(at) {
            let (own, others) = rest.split_at_mut(contact.guard_count());
            contact.guards(at, own);
            rest = others;
        }
    }

    fn at_guard(
        &self,
        which: usize,
        time: f64,
        x: &mut [f64],
        mode: &mut [f64],
    ) -> Option<Happening> {
        let Some((k, which)) = self.place_of_guard(which) else {
            let pull = self.pull(x);
            let own = &mut mode[..armature::MODES];
            self.armature.at_guard(which, pull, x, own);
            return None;
        };
        let settles = Armature::settles(mode);
        let own = &mut mode[contact_modes(k)];
        let speed = self.armature.speed(x);
        let happened = self.contacts[k].at_guard(which, time, speed, x, own);
        if settles && which == 0 {
            // At a start a contact is where the armature has it, at rest.
            let seated = (happened == Some(Happening::Closes)) == self.contacts[k].closes_seated();
            self.contacts[k].at_rest(seated, own);
        }
        happened
    }

    fn winding_of_guard(&self, which: usize) -> usize {
        self.place_of_guard(which).map_or(0, |(k, _)| k + 1)
    }
}

impl Relay {
    /// The contact that a guard is of, and its number there; None for the armature's own.
    fn place_of_guard(&self, which: usize) -> Option<(usize, usize)> {
        let mut left = which.checked_sub(armature::GUARDS)?;
        for (k, contact) in self.contacts.iter().enumerate() {
            match left.checked_sub(contact.guard_count()) {
                None => return Some((k, left)),
                Some(beyond) => left = beyond,
            }
        }
        None
    }
}
