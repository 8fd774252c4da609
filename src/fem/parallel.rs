//! Loops over elements on the machine's cores. Every element writes its own slot, so the result does not
//! depend on the number of threads.

/// Most threads used: beyond, element loops are bound by memory.
const MOST_THREADS: usize = 4;
/// Fewest elements worth a thread of their own (a thread's start costs about as much as ten elements).
const FEWEST_ELEMENTS: usize = 64;

/// Call `work(element, slot)` for each element; `slots` has `stride` numbers an element. `scratch` makes one
/// working storage a thread.
pub fn for_each_element<W>(
    elements: usize,
    slots: &mut [f64],
    stride: usize,
    scratch: impl Fn() -> W + Sync,
    work: impl Fn(usize, &mut [f64], &mut W) + Sync,
) {
    let cores = std::thread::available_parallelism().map_or(1, usize::from);
    let threads = cores
        .min(MOST_THREADS)
        .min(elements / FEWEST_ELEMENTS)
        .max(1);
    let share = elements.div_ceil(threads).max(1);
    let run = |first: usize, slots: &mut [f64]| {
        let mut storage = scratch();
        for (k, slot) in slots.chunks_mut(stride).enumerate() {
            work(first + k, slot, &mut storage);
        }
    };
    if threads == 1 {
        return run(0, &mut slots[..elements * stride]);
    }
    std::thread::scope(|scope| {
        for (t, part) in slots[..elements * stride]
            .chunks_mut(share * stride)
            .enumerate()
        {
            let run = &run;
            scope.spawn(move || run(t * share, part));
        }
    });
}
