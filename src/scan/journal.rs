//! The work units of a family that is being computed, in one file that only grows.
//!
//! Layout: a header line naming what the units belong to, then entries
//! `[key length: u32][payload length: u64][key][payload][checksum: u64]`, little endian. The checksum
//! covers everything before it in the entry. A process killed while appending, or a power cut, leaves
//! a torn tail; opening the journal cuts it off. A header that names something else (other loops,
//! another version) discards the whole journal: units are only ever a saving of time.
//!
//! Nothing is written in the first quarter of a second of a family, and then at most four times a
//! second: most families are done before, and a killed scan loses little.

use crate::engine::Checkpoint;
use crate::error::Result;
use std::collections::HashMap;
use std::fs::{File, OpenOptions};
use std::io::{Read, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::{Duration, Instant};

const PAUSE: Duration = Duration::from_millis(250);
/// Unwritten bytes that are not kept back any longer.
const MUCH: usize = 4 << 20;
const FIXED: usize = 12;

/// The journal of one family.
pub struct Journal {
    path: PathBuf,
    header: Vec<u8>,
    state: Mutex<State>,
}

struct State {
    file: Option<File>,
    /// Payload position and length of what is in the file.
    written: HashMap<String, (u64, usize)>,
    end: u64,
    /// Entries not yet written, encoded, and where their payloads are in `tail`.
    tail: Vec<u8>,
    waiting: HashMap<String, (usize, usize)>,
    flushed: Instant,
    /// Why nothing is written any more.
    broken: Option<String>,
}

impl Journal {
    /// Opens the journal at `path` for units of `subject`; a missing, torn or foreign file is no error.
    pub fn open(path: &Path, subject: &str) -> Journal {
        let header = header(subject);
        let mut state = State {
            file: None,
            written: HashMap::new(),
            end: 0,
            tail: Vec::new(),
            waiting: HashMap::new(),
            flushed: Instant::now(),
            broken: None,
        };
        if let Some((file, written, end)) = recover(path, &header) {
            state.file = Some(file);
            state.written = written;
            state.end = end;
        }
        Journal { path: path.to_path_buf(), header, state: Mutex::new(state) }
    }

    /// Removes the file at `path` if it is a journal of `subject`, which is complete.
    pub fn discard(path: &Path, subject: &str) {
        let header = header(subject);
        let mut start = vec![0; header.len()];
        let ours = File::open(path).and_then(|mut file| file.read_exact(&mut start)).is_ok() && start == header;
        if ours {
            let _ = std::fs::remove_file(path);
        }
    }

    /// How many units are known.
    pub fn len(&self) -> usize {
        let state = self.state();
        state.written.len() + state.waiting.len()
    }

    /// Whether no unit is known.
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Why units are not being written (for example a full disk), if they are not.
    pub fn trouble(&self) -> Option<String> {
        self.state().broken.clone()
    }

    /// The family is complete: removes the file.
    pub fn remove(self) {
        let mut state = self.state();
        state.file = None;
        state.tail.clear();
        state.waiting.clear();
        drop(state);
        let _ = std::fs::remove_file(&self.path);
    }

    fn state(&self) -> MutexGuard<'_, State> {
        // Every step leaves the state whole, so a panic elsewhere while it was held does no harm.
        self.state.lock().unwrap_or_else(PoisonError::into_inner)
    }

    fn flush(&self, state: &mut State) {
        if state.tail.is_empty() || state.broken.is_some() {
            return;
        }
        if let Err(cause) = self.append(state) {
            // Units are a saving of time only: go on without them, and keep what is in memory.
            state.broken = Some(format!("cannot write {}: {cause}", self.path.display()));
            if let Some(file) = &state.file {
                let _ = file.set_len(state.end);
            }
        }
        state.flushed = Instant::now();
    }

    fn append(&self, state: &mut State) -> std::io::Result<()> {
        if state.file.is_none() {
            if let Some(directory) = self.path.parent() {
                std::fs::create_dir_all(directory)?;
            }
            let mut file = OpenOptions::new().read(true).write(true).create(true).truncate(true).open(&self.path)?;
            state.end = 0;
            file.write_all(&self.header)?;
            state.end = self.header.len() as u64;
            state.file = Some(file);
        }
        let Some(file) = state.file.as_mut() else { return Ok(()) };
        file.seek(SeekFrom::Start(state.end))?;
        file.write_all(&state.tail)?;
        for (key, (start, length)) in state.waiting.drain() {
            state.written.insert(key, (state.end + start as u64, length));
        }
        state.end += state.tail.len() as u64;
        state.tail.clear();
        Ok(())
    }
}

impl Checkpoint for Journal {
    fn load(&self, key: &str) -> Option<Vec<u8>> {
        let mut state = self.state();
        if let Some(&(start, length)) = state.waiting.get(key) {
            return Some(state.tail[start..start + length].to_vec());
        }
        let (start, length) = *state.written.get(key)?;
        let mut payload = vec![0; length];
        let file = state.file.as_mut()?;
        file.seek(SeekFrom::Start(start)).ok()?;
        file.read_exact(&mut payload).ok()?;
        Some(payload)
    }

    fn store(&self, key: &str, bytes: &[u8]) -> Result<()> {
        let mut state = self.state();
        if state.broken.is_none() {
            let start = state.tail.len() + FIXED + key.len();
            encode(&mut state.tail, key, bytes);
            state.waiting.insert(key.to_string(), (start, bytes.len()));
            if state.flushed.elapsed() >= PAUSE || state.tail.len() > MUCH {
                self.flush(&mut state);
            }
        }
        Ok(())
    }
}

impl Drop for Journal {
    fn drop(&mut self) {
        let mut state = self.state.lock().unwrap_or_else(PoisonError::into_inner);
        self.flush(&mut state);
    }
}

/// The first line of a journal.
fn header(subject: &str) -> Vec<u8> {
    format!("loopladder work units 1: {subject}\n").into_bytes()
}

fn encode(out: &mut Vec<u8>, key: &str, payload: &[u8]) {
    let start = out.len();
    out.extend((key.len() as u32).to_le_bytes());
    out.extend((payload.len() as u64).to_le_bytes());
    out.extend(key.as_bytes());
    out.extend(payload);
    let sum = checksum(&out[start..]);
    out.extend(sum.to_le_bytes());
}

/// FNV-1a, 64 bits: guards against torn files, not against malice.
fn checksum(bytes: &[u8]) -> u64 {
    bytes.iter().fold(0xcbf2_9ce4_8422_2325, |sum, &byte| (sum ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3))
}

type Recovered = (File, HashMap<String, (u64, usize)>, u64);

/// The whole entries of an existing journal; whatever follows them is cut off.
fn recover(path: &Path, header: &[u8]) -> Option<Recovered> {
    let mut file = OpenOptions::new().read(true).write(true).open(path).ok()?;
    let mut bytes = Vec::new();
    file.read_to_end(&mut bytes).ok()?;
    let mut position = header.len();
    if bytes.get(..position)? != header {
        return None;
    }
    let mut written = HashMap::new();
    while let Some((key, payload, next)) = entry(&bytes, position) {
        written.insert(key, (payload as u64, next - 8 - payload));
        position = next;
    }
    file.set_len(position as u64).ok()?;
    Some((file, written, position as u64))
}

/// The entry at `start`: key, payload position, end. `None` when torn or absent.
fn entry(bytes: &[u8], start: usize) -> Option<(String, usize, usize)> {
    let key_length = u32::from_le_bytes(bytes.get(start..start + 4)?.try_into().ok()?) as usize;
    let length = u64::from_le_bytes(bytes.get(start + 4..start + FIXED)?.try_into().ok()?);
    let payload = (start + FIXED).checked_add(key_length)?;
    let end = payload.checked_add(usize::try_from(length).ok()?)?;
    let sum = u64::from_le_bytes(bytes.get(end..end.checked_add(8)?)?.try_into().ok()?);
    if checksum(&bytes[start..end]) != sum {
        return None;
    }
    let key = String::from_utf8(bytes[start + FIXED..payload].to_vec()).ok()?;
    Some((key, payload, end + 8))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn filled(path: &Path) -> Vec<u8> {
        let journal = Journal::open(path, "(8, 3)");
        for unit in 0..5u8 {
            journal.store(&format!("prime {unit}"), &vec![unit; 10 * usize::from(unit)]).unwrap();
        }
        assert_eq!(journal.load("prime 3"), Some(vec![3; 30]));
        assert!(!path.exists(), "nothing is written at once");
        drop(journal);
        std::fs::read(path).unwrap()
    }

    #[test]
    fn units_survive_and_go_when_complete() {
        let directory = tempfile::tempdir().unwrap();
        let path = directory.path().join("sub/units");
        filled(&path);
        let journal = Journal::open(&path, "(8, 3)");
        assert_eq!(journal.len(), 5);
        assert_eq!(journal.load("prime 4"), Some(vec![4; 40]));
        assert_eq!(journal.load("prime 0"), Some(vec![]));
        assert_eq!(journal.load("prime 5"), None);
        journal.store("prime 5", b"five").unwrap();
        drop(journal);
        let journal = Journal::open(&path, "(8, 3)");
        assert_eq!((journal.len(), journal.load("prime 5")), (6, Some(b"five".to_vec())));
        journal.remove();
        assert!(!path.exists());
    }

    /// Cut after every byte, and with every byte changed: never a wrong unit.
    #[test]
    fn torn_and_damaged_journals_lose_units_and_nothing_else() {
        let directory = tempfile::tempdir().unwrap();
        let path = directory.path().join("units");
        let whole = filled(&path);
        let check = |bytes: &[u8]| {
            std::fs::write(&path, bytes).unwrap();
            let journal = Journal::open(&path, "(8, 3)");
            for unit in 0..5u8 {
                if let Some(payload) = journal.load(&format!("prime {unit}")) {
                    assert_eq!(payload, vec![unit; 10 * usize::from(unit)]);
                }
            }
            let known = journal.len();
            // A journal that was cut goes on growing.
            journal.store("next", b"next").unwrap();
            drop(journal);
            let journal = Journal::open(&path, "(8, 3)");
            assert_eq!((journal.len(), journal.load("next")), (known + 1, Some(b"next".to_vec())));
            known
        };
        assert_eq!(check(&whole), 5);
        for cut in 0..whole.len() {
            assert!(check(&whole[..cut]) < 5);
        }
        for place in 0..whole.len() {
            let mut damaged = whole.clone();
            damaged[place] ^= 0x20;
            assert!(check(&damaged) < 5);
        }
    }

    #[test]
    fn units_of_something_else_are_discarded() {
        let directory = tempfile::tempdir().unwrap();
        let path = directory.path().join("units");
        filled(&path);
        Journal::discard(&path, "(8, 3) through loop 9");
        assert!(path.exists());
        assert!(Journal::open(&path, "(8, 3) through loop 9").is_empty());
        std::fs::remove_file(&path).unwrap();
        filled(&path);
        Journal::discard(&path, "(8, 3)");
        assert!(!path.exists());
    }
}
