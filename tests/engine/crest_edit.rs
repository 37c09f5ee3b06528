//! Crests edited by hand: what a user takes out, cuts, joins and draws, in any order and on any lines.

use proptest::prelude::{ProptestConfig, Strategy, any, prop, prop_assert, prop_assert_eq, proptest};

use ventifact::assert_close;
use ventifact::ground::{Grid, Point, Polygon, Polyline, Work};
use ventifact::science::crest::{
    CrestEdits, CrestLine, CrestModel, CrestOrigin, Crests, EditGround, Edited, End, Junction, Stroke,
    StrokeKind, edit,
};

const SIDE: f64 = 200.0;

fn p(x: f64, y: f64) -> Point {
    Point::new(x, y)
}

fn line(points: &[[f64; 2]]) -> Polyline {
    Polyline(points.iter().copied().map(Point::from).collect())
}

fn traced(points: &[[f64; 2]], ends: [End; 2]) -> CrestLine {
    CrestLine {
        line: line(points),
        confidence: 0.8,
        ends,
        bridged_px: 0.0,
        model: CrestModel::BrightRidge,
        origin: CrestOrigin::Traced,
        accepted: false,
        by_hand_px: 0.0,
    }
}

fn crests(lines: Vec<CrestLine>, junctions: Vec<Junction>) -> Crests {
    Crests {
        lines,
        junctions,
        model: CrestModel::BrightRidge,
        fits: Vec::new(),
        clear: true,
        sense: None,
        floor: 1.0,
        strong: 4.0,
        thresholds: [2.0, 1.0],
        scales_px: vec![2.0],
        side_px: 1.0,
    }
}

fn edited(of: &Crests, edits: &CrestEdits) -> Edited {
    let outline = Polygon::rectangle(SIDE, SIDE);
    let image = Grid::filled(SIDE as usize, SIDE as usize, 1.0f32);
    let ground = EditGround { image: &image, outline: &outline, excluded: &[] };
    edit(of.clone(), edits, ground, &Work::quiet()).unwrap()
}

fn stroke(kind: StrokeKind, points: &[[f64; 2]]) -> Stroke {
    Stroke { kind, line: line(points) }
}

fn with_strokes(strokes: Vec<Stroke>) -> CrestEdits {
    CrestEdits { strokes, ..CrestEdits::default() }
}

const FREE: [End; 2] = [End::Free; 2];

/// Two lines on one course with a gap, and a third far off.
fn two_and_one() -> Crests {
    crests(
        vec![
            traced(&[[20.0, 50.0], [60.0, 50.0], [80.0, 50.0]], FREE),
            traced(&[[140.0, 50.0], [100.0, 50.0]], FREE),
            traced(&[[20.0, 150.0], [180.0, 150.0]], [End::Free, End::Border]),
        ],
        Vec::new(),
    )
}

/// Every junction names lines that are there and ends that say so, and every such end is in one junction.
fn assert_sound(crests: &Crests) {
    let mut named: Vec<(usize, usize)> = Vec::new();
    for junction in &crests.junctions {
        assert!(junction.through < crests.lines.len(), "{junction:?}");
        assert!(!junction.branches.is_empty());
        named.extend(&junction.branches);
    }
    named.sort_unstable();
    let all =
        crests.lines.iter().enumerate().flat_map(|(n, line)| {
            (0..2).filter(|end| line.ends[*end] == End::Junction).map(move |end| (n, end))
        });
    assert_eq!(named, all.collect::<Vec<_>>());
    for line in &crests.lines {
        assert!(line.line.0.len() >= 2 && line.line.length() > 0.0);
        assert!((0.0..=1.0).contains(&line.confidence));
        assert!(line.by_hand_px <= line.line.length() * (1.0 + 1e-9));
        assert_eq!(line.ends[0] == End::Closed, line.ends[1] == End::Closed);
    }
}

#[test]
fn joining_makes_one_line_of_three() {
    let join = stroke(StrokeKind::Join, &[[81.0, 51.0], [90.0, 52.0], [100.0, 50.0]]);
    let got = edited(&two_and_one(), &with_strokes(vec![join.clone()]));
    assert_sound(&got.crests);
    assert_eq!((got.crests.lines.len(), got.lost.len()), (2, 0));
    let joined = &got.crests.lines[0];
    assert_eq!((joined.origin, joined.ends), (CrestOrigin::Edited, FREE));
    let way = p(81.0, 51.0).distance(p(90.0, 52.0)) + p(90.0, 52.0).distance(p(100.0, 50.0));
    assert_close!(joined.by_hand_px, way + 2f64.sqrt(), 1e-9, "by hand");
    assert_close!(joined.line.length(), 100.0 + joined.by_hand_px, 1e-9, "length");
    assert_close!(joined.confidence, 0.8 * 100.0 / joined.line.length(), 1e-9, "confidence");
    // It runs as its longest part does.
    assert_eq!((joined.line.0[0], joined.line.0[1]), (p(20.0, 50.0), p(60.0, 50.0)));
    // The third is as it was.
    assert_eq!(got.crests.lines[1].line, two_and_one().lines[2].line);
    assert_eq!(got.crests.lines[1].ends, [End::Free, End::Border]);
    // Twice is once, and so is nearly the same once more.
    let nearly = stroke(StrokeKind::Join, &[[80.5, 50.0], [90.0, 51.0], [100.0, 50.5]]);
    assert_eq!(edited(&two_and_one(), &with_strokes(vec![join.clone(), join.clone()])), got);
    let again = edited(&two_and_one(), &with_strokes(vec![join, nearly]));
    assert_eq!((again.crests.lines.len(), again.lost.len()), (2, 0));
}

#[test]
fn a_stroke_that_runs_along_what_it_joins_leaves_no_loop() {
    // It begins ten pixels inside the first line.
    let join = stroke(StrokeKind::Join, &[[74.0, 50.0], [86.0, 50.0], [106.0, 50.0]]);
    let got = edited(&two_and_one(), &with_strokes(vec![join]));
    assert_close!(got.crests.lines[0].line.length(), 120.0, 1e-9, "length");
    assert_close!(got.crests.lines[0].by_hand_px, 20.0, 1e-9, "by hand");
}

#[test]
fn a_cut_joined_again_is_the_line_it_was() {
    let cuts = vec![p(57.3, 52.0)];
    let cut = edited(&two_and_one(), &CrestEdits { cuts: cuts.clone(), ..CrestEdits::default() });
    assert_sound(&cut.crests);
    assert_eq!((cut.crests.lines.len(), cut.lost.len()), (4, 0));
    assert_eq!(cut.crests.lines.iter().filter(|l| l.origin == CrestOrigin::Edited).count(), 2);
    let total = |c: &Crests| c.lines.iter().map(|l| l.line.length()).sum::<f64>();
    assert_close!(total(&cut.crests), total(&two_and_one()), 1e-9, "cut");
    let strokes = vec![stroke(StrokeKind::Join, &[[57.3, 50.0], [57.3, 50.0]])];
    let joined = edited(&two_and_one(), &CrestEdits { cuts, strokes, ..CrestEdits::default() });
    assert_eq!(joined.crests.lines.len(), 3);
    assert_close!(joined.crests.lines[0].line.length(), 60.0, 1e-9, "joined again");
    assert_eq!(joined.crests.lines[0].by_hand_px, 0.0);
}

#[test]
fn a_cut_on_a_stroke_parts_what_it_joined() {
    let strokes = vec![stroke(StrokeKind::Join, &[[80.0, 50.0], [100.0, 50.0]])];
    let got =
        edited(&two_and_one(), &CrestEdits { cuts: vec![p(90.0, 50.0)], strokes, ..CrestEdits::default() });
    assert_sound(&got.crests);
    assert_eq!(got.crests.lines.len(), 3);
    assert_close!(got.crests.lines[0].line.length(), 70.0, 1e-9, "first");
    assert_close!(got.crests.lines[0].by_hand_px, 10.0, 1e-9, "by hand");
    assert_close!(got.crests.lines[1].line.length(), 50.0, 1e-9, "second");
}

#[test]
fn lengthening_takes_the_near_end_and_a_side_makes_a_fork() {
    let strokes = vec![
        stroke(StrokeKind::Extend, &[[79.0, 51.0], [80.0, 80.0], [70.0, 148.5]]),
        stroke(StrokeKind::Crest, &[[120.0, 190.0], [118.0, 151.0]]),
    ];
    let got = edited(&two_and_one(), &with_strokes(strokes));
    assert_sound(&got.crests);
    assert_eq!((got.crests.lines.len(), got.lost.len()), (4, 0));
    assert_eq!(got.crests.lines[0].ends, [End::Free, End::Junction]);
    assert_eq!(got.crests.lines[0].line.0.last(), Some(&p(70.0, 150.0)));
    let places: Vec<Point> = got.crests.junctions.iter().map(|j| j.at).collect();
    assert_eq!(places, [p(70.0, 150.0), p(118.0, 150.0)]);
    assert!(got.crests.junctions.iter().all(|j| j.through == 2));
    let drawn = &got.crests.lines[3];
    assert_eq!((drawn.origin, drawn.accepted, drawn.confidence), (CrestOrigin::Drawn, true, 0.0));
}

#[test]
fn a_drawn_crest_across_a_traced_one_is_a_crossing() {
    let got =
        edited(&two_and_one(), &with_strokes(vec![stroke(StrokeKind::Crest, &[[40.0, 20.0], [40.0, 80.0]])]));
    assert_sound(&got.crests);
    assert_eq!(got.crests.lines.len(), 5);
    let [crossing] = &got.crests.junctions[..] else { panic!("one crossing") };
    assert_eq!((crossing.at, crossing.branches.len()), (p(40.0, 50.0), 2));
    assert_eq!(got.crests.lines[crossing.through].origin, CrestOrigin::Drawn);
    assert_close!(got.crests.lines[crossing.through].line.length(), 60.0, 1e-9, "goes on");
    // A little too far is no crossing, and the tail is cut off.
    let over =
        edited(&two_and_one(), &with_strokes(vec![stroke(StrokeKind::Crest, &[[40.0, 20.0], [40.0, 52.0]])]));
    assert_eq!(over.crests.junctions[0].branches, [(3, 1)]);
    assert_close!(over.crests.lines[3].line.length(), 30.0, 1e-9, "tail");
}

#[test]
fn junctions_follow_their_lines() {
    let stem = traced(&[[100.0, 10.0], [100.0, 190.0]], [End::Border; 2]);
    let branch = traced(&[[30.0, 100.0], [100.0, 100.0]], [End::Free, End::Junction]);
    let fork = Junction { at: p(100.0, 100.0), through: 0, branches: vec![(1, 1)] };
    let of = crests(vec![stem, branch], vec![fork]);
    let cut = edited(&of, &CrestEdits { cuts: vec![p(101.0, 60.0)], ..CrestEdits::default() });
    assert_sound(&cut.crests);
    let [fork] = &cut.crests.junctions[..] else { panic!("the fork stays") };
    assert_eq!(cut.crests.lines[fork.through].line.0.last(), Some(&p(100.0, 190.0)));
    let rejected = vec![p(99.0, 30.0)];
    let gone = edited(&of, &CrestEdits { rejected: rejected.clone(), ..CrestEdits::default() });
    assert_eq!((gone.crests.lines.len(), gone.crests.junctions.len()), (1, 0));
    assert_eq!(gone.crests.lines[0].ends, FREE);
    // Cut below the fork first, the upper part alone goes.
    let half = edited(&of, &CrestEdits { rejected, cuts: vec![p(101.0, 60.0)], ..CrestEdits::default() });
    assert_sound(&half.crests);
    assert_eq!((half.crests.lines.len(), half.crests.junctions.len()), (2, 1));
}

#[test]
fn rings_open_where_they_are_cut_and_close_where_they_are_joined() {
    let round =
        traced(&[[50.0, 50.0], [90.0, 50.0], [90.0, 90.0], [50.0, 90.0], [50.0, 50.0]], [End::Closed; 2]);
    let of = crests(vec![round], Vec::new());
    for cut in [p(70.0, 50.0), p(50.0, 50.0)] {
        let got = edited(&of, &CrestEdits { cuts: vec![cut], ..CrestEdits::default() });
        assert_eq!(got.crests.lines.len(), 1);
        assert_eq!(got.crests.lines[0].ends, FREE);
        assert_close!(got.crests.lines[0].line.length(), 160.0, 1e-9, "round");
        assert_eq!((got.crests.lines[0].line.0[0], got.crests.lines[0].line.0.last()), (cut, Some(&cut)));
    }
    let twice =
        edited(&of, &CrestEdits { cuts: vec![p(70.0, 50.0), p(70.0, 90.0)], ..CrestEdits::default() });
    assert_eq!(twice.crests.lines.len(), 2);
    let open = traced(&[[50.0, 50.0], [90.0, 50.0], [90.0, 90.0], [50.0, 90.0]], FREE);
    let close = stroke(StrokeKind::Join, &[[50.0, 90.0], [50.0, 50.0]]);
    let got = edited(&crests(vec![open], Vec::new()), &with_strokes(vec![close]));
    assert_eq!((got.crests.lines.len(), got.crests.lines[0].ends), (1, [End::Closed; 2]));
    assert_close!(got.crests.lines[0].line.length(), 160.0, 1e-9, "closed");
}

#[test]
fn edits_that_find_nothing_come_back() {
    let astray = p(100.0, 100.0);
    let edits = CrestEdits {
        rejected: vec![astray],
        accepted: vec![p(f64::NAN, 3.0)],
        cuts: vec![p(20.0, 100.0)],
        strokes: vec![
            stroke(StrokeKind::Join, &[[80.0, 50.0], [80.0, 100.0]]),
            stroke(StrokeKind::Extend, &[[150.0, 100.0], [150.0, 120.0]]),
            stroke(StrokeKind::Crest, &[[-50.0, 100.0], [-10.0, 100.0]]),
            stroke(StrokeKind::Import, &[[5.0, 5.0]]),
        ],
    };
    let got = edited(&two_and_one(), &edits);
    assert_sound(&got.crests);
    assert_eq!(got.lost.len(), 7, "{:?}", got.lost);
    for at in [astray, p(20.0, 100.0), p(80.0, 100.0), p(150.0, 100.0), p(-50.0, 100.0), p(5.0, 5.0)] {
        assert!(got.lost.contains(&at), "{at:?} in {:?}", got.lost);
    }
    // What was drawn stays as drawn.
    assert_eq!(got.crests.lines.len(), 4);
}

#[test]
fn strokes_end_at_the_outline_and_at_gaps() {
    let outline = Polygon::rectangle(100.0, SIDE);
    let image = Grid::from_fn(SIDE as usize, SIDE as usize, |_, r| if r > 120 { f32::NAN } else { 1.0 });
    let pond = [Polygon {
        outer: line(&[[20.0, 20.0], [40.0, 20.0], [40.0, 40.0], [20.0, 40.0]]).0,
        holes: Vec::new(),
    }];
    let ground = EditGround { image: &image, outline: &outline, excluded: &pond };
    let edits = with_strokes(vec![
        stroke(StrokeKind::Crest, &[[41.0, 30.0], [150.0, 30.0]]),
        stroke(StrokeKind::Crest, &[[50.0, 60.0], [50.0, 119.5]]),
    ]);
    let got = edit(crests(Vec::new(), Vec::new()), &edits, ground, &Work::quiet()).unwrap();
    let ends: Vec<[End; 2]> = got.crests.lines.iter().map(|l| l.ends).collect();
    assert_eq!(ends, [[End::Gap, End::Border], [End::Free, End::Gap]]);
    assert_close!(got.crests.lines[0].line.length(), 59.0, 1e-9, "clipped");
}

#[test]
fn lines_of_a_file_that_go_on_in_one_another_are_one() {
    let strokes = vec![
        stroke(StrokeKind::Import, &[[10.0, 100.0], [50.0, 100.0]]),
        stroke(StrokeKind::Import, &[[90.0, 104.0], [50.0, 100.0]]),
        stroke(StrokeKind::Import, &[[50.0, 100.0], [80.0, 130.0]]),
    ];
    let got = edited(&crests(Vec::new(), Vec::new()), &with_strokes(strokes));
    assert_sound(&got.crests);
    assert_eq!(got.crests.lines.len(), 2);
    assert!(got.crests.lines.iter().all(|l| l.origin == CrestOrigin::Imported && !l.accepted));
    let [fork] = &got.crests.junctions[..] else { panic!("a fork: {:?}", got.crests) };
    assert_eq!((fork.at, fork.through, fork.branches.as_slice()), (p(50.0, 100.0), 0, &[(1, 0)][..]));
}

fn points(n: std::ops::Range<usize>) -> impl Strategy<Value = Vec<Point>> {
    prop::collection::vec((-20.0..220.0f64, -20.0..220.0f64).prop_map(|(x, y)| p(x, y)), n)
}

/// Smooth lines over the field, the second of each pair running onto the first.
fn fields() -> impl Strategy<Value = Crests> {
    prop::collection::vec((40.0..160.0f64, 0.0..30.0f64, any::<bool>()), 0..8).prop_map(|rows| {
        let (mut lines, mut junctions) = (Vec::new(), Vec::new());
        for (n, (y, bend, forked)) in rows.iter().enumerate() {
            let at = |x: f64| [x, y + bend * (x / 40.0 + n as f64).sin()];
            let through = lines.len();
            let course: Vec<[f64; 2]> = (1..20).map(|i| at(10.0 * f64::from(i))).collect();
            lines.push(traced(&course, [End::Border, End::Free]));
            if *forked {
                let place = at(100.0);
                lines.push(traced(
                    &[[place[0] - 30.0, (place[1] + 25.0).min(199.0)], place],
                    [End::Free, End::Junction],
                ));
                let at = Point::from(place);
                junctions.push(Junction { at, through, branches: vec![(through + 1, 1)] });
            }
        }
        crests(lines, junctions)
    })
}

fn strokes() -> impl Strategy<Value = Vec<Stroke>> {
    let kind = prop::sample::select(vec![
        StrokeKind::Crest,
        StrokeKind::Join,
        StrokeKind::Extend,
        StrokeKind::Import,
    ]);
    let one = (kind, points(0..6)).prop_map(|(kind, points)| Stroke { kind, line: Polyline(points) });
    prop::collection::vec(one, 0..8)
}

fn edits() -> impl Strategy<Value = CrestEdits> {
    (points(0..6), points(0..6), points(0..6), strokes())
        .prop_map(|(rejected, accepted, cuts, strokes)| CrestEdits { rejected, accepted, cuts, strokes })
}

/// Lines whatever their order and the way they run.
fn bare(crests: &Crests) -> Vec<(String, CrestOrigin)> {
    let mut all: Vec<(String, CrestOrigin)> = crests
        .lines
        .iter()
        .map(|l| {
            let text = |points: Vec<Point>| {
                points.iter().map(|p| format!("{:.6} {:.6}", p.x, p.y)).collect::<Vec<_>>().join(", ")
            };
            let (there, back) = (text(l.line.0.clone()), text(l.line.0.iter().rev().copied().collect()));
            (there.min(back), l.origin)
        })
        .collect();
    all.sort_by(|a, b| a.0.cmp(&b.0));
    all
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(128))]

    #[test]
    fn any_edits_leave_sound_lines(of in fields(), edits in edits()) {
        let got = edited(&of, &edits);
        assert_sound(&got.crests);
        let outline = Polygon::rectangle(SIDE, SIDE);
        for line in &got.crests.lines {
            prop_assert!(line.line.0.iter().all(|p| outline.contains(*p) || outline.distance_to_edge(*p) < 1e-6));
        }
    }

    #[test]
    fn the_order_of_edits_does_not_matter(of in fields(), edits in edits()) {
        let mut turned = edits.clone();
        for list in [&mut turned.rejected, &mut turned.accepted, &mut turned.cuts] {
            list.reverse();
        }
        turned.strokes.reverse();
        prop_assert_eq!(bare(&edited(&of, &edits).crests), bare(&edited(&of, &turned).crests));
    }

    #[test]
    fn edits_made_twice_are_made_once(of in fields(), edits in edits()) {
        let twice = |list: &[Point]| [list, list].concat();
        let again = CrestEdits {
            rejected: twice(&edits.rejected),
            accepted: twice(&edits.accepted),
            cuts: twice(&edits.cuts),
            strokes: [edits.strokes.as_slice(), edits.strokes.as_slice()].concat(),
        };
        prop_assert_eq!(edited(&of, &edits).crests, edited(&of, &again).crests);
    }

    #[test]
    fn rejecting_all_leaves_only_strokes(of in fields(), strokes in strokes()) {
        let rejected = of.lines.iter().flat_map(|l| l.line.0.iter().copied()).collect();
        let got = edited(&of, &CrestEdits { rejected, strokes: strokes.clone(), ..CrestEdits::default() });
        let by_hand = |origin| [CrestOrigin::Drawn, CrestOrigin::Imported].contains(&origin);
        prop_assert!(got.crests.lines.iter().all(|l| by_hand(l.origin)));
        let alone = edited(&crests(Vec::new(), Vec::new()), &with_strokes(strokes));
        prop_assert_eq!(bare(&got.crests), bare(&alone.crests));
    }

    #[test]
    fn cutting_and_joining_gives_back_the_length(of in fields(), pick in any::<prop::sample::Index>(), share in 0.1..0.9f64) {
        let of = crests(of.lines.into_iter().step_by(3).collect(), Vec::new());
        if of.lines.is_empty() {
            return Ok(());
        }
        let line = &of.lines[pick.index(of.lines.len())].line;
        let pieces = line.cut(&[share * line.length()]);
        let at = pieces[1].0[0];
        let strokes = vec![Stroke { kind: StrokeKind::Join, line: Polyline(vec![at, at]) }];
        let got = edited(&of, &CrestEdits { cuts: vec![at], strokes, ..CrestEdits::default() });
        let lengths = |c: &Crests| c.lines.iter().map(|l| l.line.length()).sum::<f64>();
        prop_assert_eq!(got.crests.lines.len(), of.lines.len());
        prop_assert!((lengths(&got.crests) - lengths(&of)).abs() < 1e-6);
    }
}
