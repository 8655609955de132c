//! What a series fit is given.

use super::SeriesError;

/// One measured member of a series.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Member {
    /// Principal quantum number.
    pub n: u32,
    /// Energy above the ground level, cm⁻¹.
    pub energy_per_cm: f64,
    /// 1 σ of the energy, cm⁻¹; values below 1e-4 are taken as 1e-4.
    pub uncertainty_per_cm: f64,
}

/// The series limit above the ground level.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Limit {
    /// Known from elsewhere, with its uncertainty; the fit may move it within that. Where the
    /// limit and the levels come from different sources, the σ has to hold the uncertainty of
    /// their scales as well.
    Fixed {
        /// Limit, cm⁻¹.
        per_cm: f64,
        /// 1 σ of the limit, cm⁻¹.
        sigma_per_cm: f64,
    },
    /// Fitted to the members.
    Fitted {
        /// Where the search starts, cm⁻¹.
        start_per_cm: f64,
    },
}

impl Limit {
    /// The value given, cm⁻¹: fixed or start.
    pub fn given_per_cm(&self) -> f64 {
        match *self {
            Self::Fixed { per_cm, .. } => per_cm,
            Self::Fitted { start_per_cm } => start_per_cm,
        }
    }
}

/// How easily the core is excited, which decides how far a series can be trusted.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Core {
    /// 1s, 1s² or a closed p⁶ shell: its excited configurations lie above the series limit.
    Rigid,
    /// Anything else (ns, ns², d¹⁰, open shells): doubly excited levels can cross the series.
    Soft,
}

impl Core {
    /// Reads a core such as `1s2`, `4p6`, `3d10 4s`; an empty label counts as soft.
    pub fn of_label(core: &str) -> Self {
        let mut shells = core.split_whitespace().rev();
        match shells.find(|token| !token.starts_with('(')) {
            Some("1s" | "1s2") => Self::Rigid,
            Some(last) if last.ends_with("p6") => Self::Rigid,
            _ => Self::Soft,
        }
    }
}

/// A Rydberg series of one core state, l and J.
#[derive(Clone, Debug, PartialEq)]
pub struct SeriesInput {
    /// Charge that the outer electron sees: 1 for a neutral atom, 2 for a singly charged ion.
    pub core_charge: u32,
    /// Rydberg constant of the nucleus, cm⁻¹ (`R∞ / (1 + m_e/M)`).
    pub rydberg_per_cm: f64,
    /// Orbital angular momentum of the outer electron.
    pub l: u32,
    /// How easily the core is excited.
    pub core: Core,
    /// The series limit.
    pub limit: Limit,
    /// Measured members, in any order.
    pub members: Vec<Member>,
}

/// Least 1 σ that a level is given, cm⁻¹: keeps exact entries from swamping the others.
pub(super) const LEAST_SIGMA_PER_CM: f64 = 1e-4;

impl SeriesInput {
    /// `Z_c² R_M`, cm⁻¹.
    pub fn strength_per_cm(&self) -> f64 {
        f64::from(self.core_charge).powi(2) * self.rydberg_per_cm
    }

    /// Members in order of n, checked.
    pub(super) fn checked(&self) -> Result<Vec<Member>, SeriesError> {
        positive("the core charge", f64::from(self.core_charge))?;
        positive("the Rydberg constant", self.rydberg_per_cm)?;
        positive("the series limit", self.limit.given_per_cm())?;
        if let Limit::Fixed { sigma_per_cm, .. } = self.limit {
            not_negative("the uncertainty of the limit", sigma_per_cm)?;
        }
        let mut members = self.members.clone();
        members.sort_by_key(|member| member.n);
        for member in &members {
            self.check_member(member)?;
        }
        match members.windows(2).find(|pair| pair[0].n == pair[1].n) {
            Some(pair) => Err(SeriesError::RepeatedMember { n: pair[0].n }),
            None => Ok(members),
        }
    }

    fn check_member(&self, member: &Member) -> Result<(), SeriesError> {
        not_negative("the energy of a level", member.energy_per_cm)?;
        not_negative("the uncertainty of a level", member.uncertainty_per_cm)?;
        if self.l >= member.n {
            return Err(SeriesError::AngularMomentum {
                n: member.n,
                l: self.l,
            });
        }
        let limit_per_cm = self.limit.given_per_cm();
        if member.energy_per_cm >= limit_per_cm {
            return Err(SeriesError::AboveLimit {
                n: member.n,
                energy_per_cm: member.energy_per_cm,
                limit_per_cm,
            });
        }
        Ok(())
    }
}

fn positive(what: &'static str, value: f64) -> Result<(), SeriesError> {
    if value.is_finite() && value > 0.0 {
        return Ok(());
    }
    Err(SeriesError::BadNumber {
        what,
        value,
        condition: " above zero",
    })
}

fn not_negative(what: &'static str, value: f64) -> Result<(), SeriesError> {
    if value.is_finite() && value >= 0.0 {
        return Ok(());
    }
    Err(SeriesError::BadNumber {
        what,
        value,
        condition: " of zero or more",
    })
}
