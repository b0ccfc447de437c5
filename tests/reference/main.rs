//! Published figures and their recomputations, row by row; each file names its source in its first lines.

mod certainty;
mod evidence;
mod factors;
mod npv;
mod omb;
mod ramsey;
mod schedules;
mod second_opinion;
mod tables;
