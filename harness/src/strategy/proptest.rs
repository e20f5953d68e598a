//! The sources as strategies of the crate proptest.

use proptest::strategy::{NewTree, Strategy, ValueTree};
use proptest::test_runner::TestRunner;

use super::shrink::Shrink;
use super::{Wave, WavePlan, Waves, Word, WordPlan, Words};

impl Strategy for Words {
    type Tree = WordTree;
    type Value = Word;

    fn new_tree(&self, runner: &mut TestRunner) -> NewTree<Self> {
        Ok(WordTree(Shrink::new(self.plan(runner.rng()))))
    }
}

impl Strategy for Waves {
    type Tree = WaveTree;
    type Value = Wave;

    fn new_tree(&self, runner: &mut TestRunner) -> NewTree<Self> {
        Ok(WaveTree(Shrink::new(self.plan(runner.rng()))))
    }
}

macro_rules! trees {
    ($($(#[$doc:meta])* $tree:ident: $plan:ty => $value:ty;)*) => {$(
        $(#[$doc])*
        #[derive(Clone, Debug)]
        pub struct $tree(Shrink<$plan>);

        impl ValueTree for $tree {
            type Value = $value;

            fn current(&self) -> $value {
                self.0.current()
            }

            fn simplify(&mut self) -> bool {
                self.0.simplify()
            }

            fn complicate(&mut self) -> bool {
                self.0.complicate()
            }
        }
    )*};
}

trees! {
    /// A word while it is made simpler.
    WordTree: WordPlan => Word;
    /// A trace and its samples while they are made simpler.
    WaveTree: WavePlan => Wave;
}
