//! Published figures and their recomputations, each file naming its source in its first lines.

mod certainty;
mod evidence;
mod factors;
mod npv;
mod omb;
mod ramsey;
mod schedules;
mod tables;
