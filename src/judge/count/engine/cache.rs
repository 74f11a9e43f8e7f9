//! The cache: the counts of the parts met so far.
//!
//! The key of a part is exact (see the `components` module): a hit compares all of it, so no hash collision can change a
//! count. Entries are chained by hash; when the memory is used up, the half that was not asked for of late goes.
//!
//! Learnt clauses may make a wrong entry, and such entries must go before they are used: while one part is counted, a
//! learnt clause may draw conclusions from a sibling part that turns out to have no model at all (T. Sang, F. Bacchus,
//! P. Beame, H. Kautz, T. Pitassi, "Combining component caching and clause learning for effective model counting", SAT
//! 2004, section 4). The cache keeps a log of its entries, and the search takes back what it wrote since a given place.

use super::number::Number;

struct Entry<N> {
    key: Box<[u8]>,
    value: Number,
    node: N,
    hash: u64,
    next: u32,
    /// When it was last of use.
    used: u64,
    /// Which entry of all times it is.
    serial: u64,
}

/// Counts by key.
pub(crate) struct Cache<N> {
    entries: Vec<Option<Entry<N>>>,
    vacant: Vec<u32>,
    heads: Vec<u32>,
    log: Vec<(u32, u64)>,
    bytes: u64,
    limit: u64,
    clock: u64,
    serial: u64,
    /// How many lookups found something.
    pub(crate) hits: u64,
    /// How many lookups there were.
    pub(crate) lookups: u64,
    /// How many entries were dropped for want of memory.
    pub(crate) evicted: u64,
}

const NONE: u32 = u32::MAX;
const FIRST_HEADS: usize = 1 << 10;
/// What the entry in its vector, its place in the log and the allocation of its key cost besides the key.
const ENTRY_BYTES: u64 = 160;
/// Shares of the memory that growing vectors may waste: they double, and while they do both copies live.
const SLACK: u64 = 2;

impl<N: Clone> Cache<N> {
    /// An empty cache that keeps below this many bytes.
    pub(crate) fn new(limit: u64) -> Self {
        Self {
            entries: Vec::new(),
            vacant: Vec::new(),
            heads: vec![NONE; FIRST_HEADS],
            log: Vec::new(),
            bytes: 0,
            limit: limit / SLACK,
            clock: 0,
            serial: 0,
            hits: 0,
            lookups: 0,
            evicted: 0,
        }
    }

    /// The hash that the other functions take.
    pub(crate) fn hash(key: &[u8]) -> u64 {
        let mut hash = key.len() as u64;
        for chunk in key.chunks(8) {
            let mut word = [0; 8];
            word[..chunk.len()].copy_from_slice(chunk);
            hash = (hash.rotate_left(23) ^ u64::from_le_bytes(word)).wrapping_mul(0x9e37_79b9_7f4a_7c15);
            hash ^= hash >> 29;
        }
        hash
    }

    /// The count of this part, if it is known.
    pub(crate) fn get(&mut self, key: &[u8], hash: u64) -> Option<(Number, N)> {
        self.lookups += 1;
        self.clock += 1;
        let mut at = self.heads[hash as usize & (self.heads.len() - 1)];
        while at != NONE {
            let entry = self.entries[at as usize].as_mut().expect("chained entries exist");
            if entry.hash == hash && *entry.key == *key {
                entry.used = self.clock;
                self.hits += 1;
                return Some((entry.value.clone(), entry.node.clone()));
            }
            at = entry.next;
        }
        None
    }

    /// Keeps a count.
    pub(crate) fn put(&mut self, key: &[u8], hash: u64, value: Number, node: N) {
        let cost = key.len() as u64 + value.heap_bytes() as u64 + ENTRY_BYTES;
        if self.bytes + cost > self.limit {
            self.evict();
            if self.bytes + cost > self.limit {
                return;
            }
        }
        self.bytes += cost;
        self.clock += 1;
        self.serial += 1;
        if self.entries.len() - self.vacant.len() >= self.heads.len() {
            self.rehash(self.heads.len() * 2);
        }
        let head = hash as usize & (self.heads.len() - 1);
        let next = self.heads[head];
        let entry = Entry { key: key.into(), value, node, hash, next, used: self.clock, serial: self.serial };
        let at = match self.vacant.pop() {
            Some(at) => {
                self.entries[at as usize] = Some(entry);
                at
            }
            None => {
                self.entries.push(Some(entry));
                self.entries.len() as u32 - 1
            }
        };
        self.heads[head] = at;
        self.log.push((at, self.serial));
    }

    /// The serial number of the latest entry: what [`Cache::retract`] takes.
    pub(crate) fn mark(&self) -> u64 {
        self.serial
    }

    /// Takes back the entries after one mark up to another.
    pub(crate) fn retract(&mut self, after: u64, up_to: u64) {
        let from = self.log.partition_point(|&(_, serial)| serial <= after);
        let to = self.log.partition_point(|&(_, serial)| serial <= up_to);
        let taken: Vec<(u32, u64)> = self.log.drain(from..to.max(from)).collect();
        for (at, serial) in taken {
            if self.entries[at as usize].as_ref().is_some_and(|entry| entry.serial == serial) {
                self.remove(at);
            }
        }
    }

    fn remove(&mut self, at: u32) {
        let entry = self.entries[at as usize].take().expect("the caller looked");
        let head = entry.hash as usize & (self.heads.len() - 1);
        if self.heads[head] == at {
            self.heads[head] = entry.next;
        } else {
            let mut before = self.heads[head];
            while let Some(other) = &mut self.entries[before as usize]
                && other.next != at
            {
                before = other.next;
            }
            self.entries[before as usize].as_mut().expect("chained entries exist").next = entry.next;
        }
        self.bytes -= entry.key.len() as u64 + entry.value.heap_bytes() as u64 + ENTRY_BYTES;
        self.vacant.push(at);
    }

    fn evict(&mut self) {
        let mut uses: Vec<u64> = self.entries.iter().flatten().map(|entry| entry.used).collect();
        if uses.is_empty() {
            return;
        }
        let middle = uses.len() / 2;
        let (_, &mut median, _) = uses.select_nth_unstable(middle);
        for at in 0..self.entries.len() {
            if self.entries[at].as_ref().is_some_and(|entry| entry.used <= median) {
                let entry = self.entries[at].take().expect("just seen");
                self.bytes -= entry.key.len() as u64 + entry.value.heap_bytes() as u64 + ENTRY_BYTES;
                self.vacant.push(at as u32);
                self.evicted += 1;
            }
        }
        self.rehash(self.heads.len());
        let entries = &self.entries;
        self.log.retain(|&(at, serial)| entries[at as usize].as_ref().is_some_and(|entry| entry.serial == serial));
    }

    fn rehash(&mut self, heads: usize) {
        self.heads.clear();
        self.heads.resize(heads, NONE);
        for (at, entry) in self.entries.iter_mut().enumerate() {
            if let Some(entry) = entry {
                let head = entry.hash as usize & (heads - 1);
                entry.next = self.heads[head];
                self.heads[head] = at as u32;
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn put(cache: &mut Cache<()>, key: &[u8], value: u128) {
        cache.put(key, Cache::<()>::hash(key), Number::Small(value), ());
    }

    fn get(cache: &mut Cache<()>, key: &[u8]) -> Option<u128> {
        cache.get(key, Cache::<()>::hash(key)).map(|(value, ())| match value {
            Number::Small(small) => small,
            Number::Big(_) => unreachable!("only small values here"),
        })
    }

    #[test]
    fn keys_that_share_a_hash_stay_apart() {
        let mut cache: Cache<()> = Cache::new(1 << 20);
        cache.put(b"one", 7, Number::Small(1), ());
        cache.put(b"two", 7, Number::Small(2), ());
        assert_eq!(cache.get(b"one", 7).unwrap().0, Number::Small(1));
        assert_eq!(cache.get(b"two", 7).unwrap().0, Number::Small(2));
        assert!(cache.get(b"six", 7).is_none());
    }

    #[test]
    fn retracting_takes_exactly_the_named_entries() {
        let mut cache: Cache<()> = Cache::new(1 << 20);
        for key in 0..50u8 {
            put(&mut cache, &[key], u128::from(key));
        }
        let from = cache.mark();
        for key in 50..80u8 {
            put(&mut cache, &[key], u128::from(key));
        }
        let to = cache.mark();
        put(&mut cache, &[99], 99);
        cache.retract(from, to);
        for key in 0..80u8 {
            assert_eq!(get(&mut cache, &[key]).is_some(), key < 50, "{key}");
        }
        assert_eq!(get(&mut cache, &[99]), Some(99));
    }

    #[test]
    fn memory_stays_below_the_limit_and_values_stay_right() {
        let mut cache: Cache<()> = Cache::new(100_000);
        for key in 0..20_000u32 {
            put(&mut cache, &key.to_le_bytes(), u128::from(key) * 3);
            assert!(cache.bytes <= cache.limit);
        }
        assert!(cache.evicted > 10_000);
        let known = (0..20_000u32).filter(|key| {
            let value = get(&mut cache, &key.to_le_bytes());
            assert!(value.is_none() || value == Some(u128::from(*key) * 3));
            value.is_some()
        });
        assert!(known.count() > 50);
    }
}
