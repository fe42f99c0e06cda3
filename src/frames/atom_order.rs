//! The order of a dump's atoms: ascending in their ids, whatever their order in the file.

/// A table from ids to places may be this many times longer than the number of atoms; sparser ids are searched for.
const MOST_SPARSE: u64 = 8;

/// Entry of the table for an id that no atom has.
const NO_ATOM: u32 = u32::MAX;

/// The place of each id.
#[derive(Clone, Debug, Default)]
pub(super) struct AtomOrder {
    /// Ascending; empty where the dump has no ids.
    ids: Vec<u64>,
    /// The place of id `ids[0] + k`; empty where ids are too sparse for it.
    places: Vec<u32>,
}

impl AtomOrder {
    /// The order of atoms with these ids, given in any order.
    ///
    /// # Errors
    /// The id that two of them have.
    pub fn new(mut ids: Vec<u64>) -> Result<Self, u64> {
        ids.sort_unstable();
        if let Some(&[id, _]) = ids.array_windows().find(|[one, other]| one == other) {
            return Err(id);
        }
        let mut places = Vec::new();
        if let (Some(&first), Some(&last)) = (ids.first(), ids.last())
            && (last - first) / MOST_SPARSE <= ids.len() as u64
        {
            places = vec![NO_ATOM; (last - first) as usize + 1];
            for (place, id) in ids.iter().enumerate() {
                places[(id - first) as usize] = place as u32;
            }
        }
        Ok(Self { ids, places })
    }

    /// Whether the dump has no ids, so that the order is that of the file.
    pub fn is_of_file(&self) -> bool {
        self.ids.is_empty()
    }

    /// The place of an id; `None` where no atom has it.
    #[inline]
    pub fn place(&self, id: u64) -> Option<usize> {
        if self.places.is_empty() {
            return self.ids.binary_search(&id).ok();
        }
        let offset = usize::try_from(id.checked_sub(self.ids[0])?).ok()?;
        let place = *self.places.get(offset)?;
        (place != NO_ATOM).then_some(place as usize)
    }
}

#[cfg(test)]
mod tests {
    use super::AtomOrder;

    #[test]
    fn dense_and_sparse_ids_have_the_places_of_their_order() {
        for step in [1, 3, 1_000_000_007] {
            let ids: Vec<u64> = (0..50).rev().map(|k| 5 + step * k).collect();
            let order = AtomOrder::new(ids).expect("no id comes twice");
            assert_eq!(order.places.is_empty(), step > 3);
            for k in 0..50 {
                assert_eq!(order.place(5 + step * k), Some(k as usize));
            }
            for absent in [0, 4, 5 + 50 * step, u64::MAX] {
                assert_eq!(order.place(absent), None);
            }
            assert_eq!(order.place(6), (step == 1).then_some(1));
        }
        assert_eq!(AtomOrder::new(vec![7, 9, 7]).err(), Some(7));
        assert!(AtomOrder::new(Vec::new()).is_ok_and(|order| order.is_of_file()));
    }
}
