//! Background work: one live job a slot, the latest wins, stale answers are dropped by ticket, and
//! a panic becomes an answer like any other.

use std::fmt;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::Arc;
use std::sync::mpsc::{Receiver, Sender, channel};
use std::thread;

use crate::ground::{Progress, Work};

/// Called from a job's thread when an answer waits.
pub type Wake = Arc<dyn Fn() + Send + Sync>;

/// The kinds of work that may run beside one another.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Slot {
    OpenRaster,
    Demo,
    Measure,
    /// Channel networks.
    Networks,
    /// Two pictures of one ground.
    Comparisons,
    /// Bedforms laid into a patch and sought again.
    Recovery,
    /// The pen: its ground and the way to the pointer.
    Pen,
    /// What ways between random places cost.
    Chance,
    ReadWinds,
    Plate,
    Export,
}

impl Slot {
    pub const ALL: [Self; 11] = [
        Self::Comparisons,
        Self::OpenRaster,
        Self::Demo,
        Self::Measure,
        Self::Networks,
        Self::Recovery,
        Self::Pen,
        Self::Chance,
        Self::ReadWinds,
        Self::Plate,
        Self::Export,
    ];
}

/// The running jobs and the way their answers come back.
pub struct Jobs<A> {
    wake: Wake,
    sender: Sender<Letter<A>>,
    letters: Receiver<Letter<A>>,
    live: Vec<Live>,
    next_ticket: u64,
}

/// How a job talks back while it works.
pub struct Post<A> {
    ticket: u64,
    sender: Sender<Letter<A>>,
    wake: Wake,
}

/// What came from a job that is still the latest of its slot.
#[derive(Debug, PartialEq)]
pub enum Delivery<A> {
    Answer(Slot, A),
    /// The job is over: its last answer came before this.
    Ended(Slot),
    /// The job panicked; the text says where.
    Broke(Slot, String),
}

/// A job as the footer shows it.
#[derive(Clone, Debug, PartialEq)]
pub struct Running {
    pub slot: Slot,
    pub label: String,
    pub progress: Progress,
    /// Stop was asked for and the job has not yet noticed.
    pub stopping: bool,
}

struct Live {
    slot: Slot,
    ticket: u64,
    label: String,
    work: Work,
}

struct Letter<A> {
    ticket: u64,
    content: Content<A>,
}

enum Content<A> {
    Answer(A),
    Ended,
    Broke(String),
}

impl<A: Send + 'static> Jobs<A> {
    pub fn new(wake: Wake) -> Self {
        let (sender, letters) = channel();
        Self { wake, sender, letters, live: Vec::new(), next_ticket: 0 }
    }

    /// Runs `job` on its own thread; whatever ran in the slot is stopped and its answers dropped.
    pub fn start(
        &mut self,
        slot: Slot,
        label: impl Into<String>,
        job: impl FnOnce(&Work, &Post<A>) + Send + 'static,
    ) {
        self.abandon(slot);
        let ticket = self.next_ticket;
        self.next_ticket += 1;
        let work = Work::default();
        let post = Post { ticket, sender: self.sender.clone(), wake: Arc::clone(&self.wake) };
        self.live.push(Live { slot, ticket, label: label.into(), work: work.clone() });
        thread::spawn(move || {
            let content = match catch_unwind(AssertUnwindSafe(|| job(&work, &post))) {
                Ok(()) => Content::Ended,
                Err(panic) => Content::Broke(panic_text(panic.as_ref())),
            };
            post.send(content);
        });
    }

    /// What jobs and tile shelves call when an answer waits.
    pub fn wake(&self) -> Wake {
        Arc::clone(&self.wake)
    }

    /// Asks the job in `slot` to stop; it ends within a tenth of a second.
    pub fn stop(&self, slot: Slot) {
        self.live.iter().filter(|live| live.slot == slot).for_each(|live| live.work.stop());
    }

    /// Stops the job in `slot` and never hears of it again.
    pub fn abandon(&mut self, slot: Slot) {
        self.stop(slot);
        self.live.retain(|live| live.slot != slot);
    }

    pub fn is_running(&self, slot: Slot) -> bool {
        self.live.iter().any(|live| live.slot == slot)
    }

    pub fn is_idle(&self) -> bool {
        self.live.is_empty()
    }

    /// The jobs under way, oldest first.
    pub fn running(&self) -> Vec<Running> {
        self.live
            .iter()
            .map(|live| Running {
                slot: live.slot,
                label: live.label.clone(),
                progress: live.work.progress(),
                stopping: live.work.is_stopped(),
            })
            .collect()
    }

    /// The next waiting answer of a job that is still the latest of its slot.
    pub fn next_delivery(&mut self) -> Option<Delivery<A>> {
        while let Ok(Letter { ticket, content }) = self.letters.try_recv() {
            let Some(at) = self.live.iter().position(|live| live.ticket == ticket) else { continue };
            let slot = self.live[at].slot;
            return Some(match content {
                Content::Answer(answer) => Delivery::Answer(slot, answer),
                Content::Ended => {
                    self.live.remove(at);
                    Delivery::Ended(slot)
                }
                Content::Broke(text) => {
                    self.live.remove(at);
                    Delivery::Broke(slot, text)
                }
            });
        }
        None
    }
}

impl<A> Post<A> {
    /// Sends an answer now; a job may send several.
    pub fn answer(&self, answer: A) {
        self.send(Content::Answer(answer));
    }

    /// A closed window no longer listens; then the letter is lost on purpose.
    fn send(&self, content: Content<A>) {
        if self.sender.send(Letter { ticket: self.ticket, content }).is_ok() {
            (self.wake)();
        }
    }
}

impl<A> Drop for Jobs<A> {
    fn drop(&mut self) {
        self.live.iter().for_each(|live| live.work.stop());
    }
}

impl<A> fmt::Debug for Jobs<A> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_list().entries(self.live.iter().map(|live| (live.slot, &live.label))).finish()
    }
}

fn panic_text(panic: &(dyn std::any::Any + Send)) -> String {
    let text = panic.downcast_ref::<&str>().copied().or(panic.downcast_ref::<String>().map(String::as_str));
    text.unwrap_or("no message").to_owned()
}

#[cfg(test)]
mod tests {
    use std::sync::Arc;
    use std::sync::atomic::{AtomicU32, Ordering};
    use std::thread::sleep;
    use std::time::{Duration, Instant};

    use super::{Delivery, Jobs, Slot};

    fn wait(jobs: &mut Jobs<u32>) -> Vec<Delivery<u32>> {
        let end = Instant::now() + Duration::from_secs(10);
        let mut got = Vec::new();
        while !jobs.is_idle() && Instant::now() < end {
            got.extend(jobs.next_delivery());
            sleep(Duration::from_millis(1));
        }
        got
    }

    #[test]
    fn the_latest_job_wins_and_the_stale_answer_is_dropped() {
        let woken = Arc::new(AtomicU32::new(0));
        let count = Arc::clone(&woken);
        let mut jobs = Jobs::new(Arc::new(move || {
            count.fetch_add(1, Ordering::Relaxed);
        }));
        jobs.start(Slot::Measure, "old", |work, post| {
            while work.advance(1).is_ok() {
                sleep(Duration::from_millis(1));
            }
            post.answer(1);
        });
        jobs.start(Slot::Measure, "new", |_, post| post.answer(2));
        assert_eq!(wait(&mut jobs), [Delivery::Answer(Slot::Measure, 2), Delivery::Ended(Slot::Measure)]);
        assert!(woken.load(Ordering::Relaxed) >= 2);
    }

    #[test]
    fn a_panic_is_an_answer() {
        let mut jobs = Jobs::new(Arc::new(|| ()));
        jobs.start(Slot::ReadWinds, "breaks", |_, _| std::panic::resume_unwind(Box::new("lost its way")));
        assert_eq!(wait(&mut jobs), [Delivery::Broke(Slot::ReadWinds, "lost its way".into())]);
    }

    #[test]
    fn stop_reaches_the_job() {
        let mut jobs = Jobs::new(Arc::new(|| ()));
        jobs.start(Slot::Export, "long", |work, _| while work.advance(1).is_ok() {});
        jobs.stop(Slot::Export);
        assert!(jobs.running()[0].stopping);
        assert_eq!(wait(&mut jobs), [Delivery::Ended(Slot::Export)]);
    }
}
