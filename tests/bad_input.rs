//! Bad input gives a typed error that names what, where and how to mend it; endings of a run lose nothing.

use std::time::Duration;

use hypercircle::assembly::AssemblyError;
use hypercircle::mesh::{
    Arrays, Interval, LoopFault, Mesh, MeshError, Outline, Rectangle, between, polygon, rectangle,
};
use hypercircle::solve::Automatic;
use hypercircle::{
    Budget, Diffusion, Ending, Error, Goal, Guarantee, Limit, Place, Round, Signal, Tensor, Tolerance, Unwatched,
};

/// Every message ends with the mend, behind a colon or semicolon.
fn mended<E: std::fmt::Display>(error: E) -> E {
    let text = error.to_string();
    let mend = text.rsplit([':', ';']).next().unwrap_or_default();
    assert!(text.contains([':', ';']) && mend.trim().split(' ').count() >= 2, "no mend in: {text}");
    error
}

fn plate() -> Mesh<2> {
    Rectangle::new([0.0, 0.0], [1.0, 1.0], [4, 4]).region("plate").mesh().unwrap()
}

fn stated() -> Diffusion<2> {
    Diffusion::on(plate()).conductivity("plate", 1.0).dirichlet("left", 0.0).robin("right", 2.0, 1.0)
}

fn assembly_error(problem: Diffusion<2>) -> AssemblyError {
    match mended(problem.solve().unwrap_err()) {
        Error::Assembly(error) => error,
        other => panic!("{other}"),
    }
}

#[test]
fn outlines() {
    let square = || polygon(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)]);
    let fault = |corners: &[(f64, f64)]| {
        let mut outline = Outline::new();
        let stated = outline.region("body", polygon(corners)).map(|_| ());
        match mended(stated.and_then(|()| outline.mesh(0.5).map(|_| ())).unwrap_err()) {
            MeshError::Loop { fault, .. } => fault,
            other => panic!("{other}"),
        }
    };
    assert_eq!(fault(&[(0.0, 0.0), (1.0, f64::NAN), (1.0, 1.0)]), LoopFault::NotFinite);
    assert_eq!(fault(&[(0.0, 0.0), (1.0, 0.0), (1.0, 0.0), (1.0, 1.0)]), LoopFault::RepeatedCorner);
    assert_eq!(fault(&[(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)]), LoopFault::CrossesItself);
    assert_eq!(fault(&[(0.0, 0.0), (1.0, 0.0)]), LoopFault::TooFewCorners);
    assert_eq!(fault(&[(0.0, 0.0), (1.0, 0.0), (2.0, 0.0)]), LoopFault::NoArea);
    // Crossing loops, a hole outside, parts that touch in a point.
    let mut crossing = Outline::new();
    crossing.region("body", square()).unwrap();
    crossing.region("other", rectangle((0.5, 0.5), (1.5, 0.75))).unwrap();
    assert!(matches!(mended(crossing.mesh(0.5).unwrap_err()), MeshError::CrossingLoops { .. }));
    let mut outside = Outline::new();
    outside.region("body", square()).unwrap();
    outside.hole("duct", rectangle((2.0, 2.0), (3.0, 3.0))).unwrap();
    assert!(matches!(mended(outside.mesh(0.5).unwrap_err()), MeshError::Loop { fault: LoopFault::Outside, .. }));
    let mut pinched = Outline::new();
    pinched.region("a", square()).unwrap();
    pinched.region("b", rectangle((1.0, 1.0), (2.0, 2.0))).unwrap();
    assert!(matches!(mended(pinched.mesh(0.5).unwrap_err()), MeshError::PinchedVertex { at, .. } if at == [1.0, 1.0]));
    // Names and sizes.
    let mut names = Outline::new();
    names.region("body", square()).unwrap();
    names.side("nowhere", between((5.0, 5.0), (6.0, 5.0))).unwrap();
    assert!(matches!(mended(names.mesh(0.5).unwrap_err()), MeshError::NoSuchSide { name, .. } if name == "nowhere"));
    let mut sizes = Outline::new();
    sizes.region("body", square()).unwrap();
    for size in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(matches!(mended(sizes.mesh(size).unwrap_err()), MeshError::NotPositive { .. }));
    }
    assert!(matches!(mended(Outline::new().mesh(0.5).unwrap_err()), MeshError::Empty { .. }));
    sizes.max_cells(10);
    assert!(matches!(mended(sizes.mesh(0.001).unwrap_err()), MeshError::TooMany { .. }));
}

#[test]
fn intervals_and_arrays() {
    assert!(Interval::uniform(1.0, 1.0, 4).mesh().map_err(mended).is_err());
    assert!(Interval::uniform(0.0, f64::INFINITY, 4).mesh().map_err(mended).is_err());
    assert!(Interval::uniform(0.0, 1.0, 0).mesh().map_err(mended).is_err());
    assert!(Interval::from_nodes(&[0.0, 0.5, 0.5, 1.0]).mesh().map_err(mended).is_err());
    assert!(Interval::from_nodes(&[0.0, f64::NAN, 1.0]).mesh().map_err(mended).is_err());

    let corners = || vec![[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]];
    let check = |points: Vec<[f64; 2]>, cells: &[[u32; 3]]| mended(Arrays::new(points, cells).mesh().unwrap_err());
    let cell = hypercircle::mesh::CellId;
    let told = check(corners(), &[[0, 1, 2], [0, 3, 2]]);
    assert!(matches!(told, MeshError::InvertedCell { cell: c, .. } if c == cell(1)));
    let mut flat = corners();
    flat[3] = [0.5, 0.5];
    assert!(matches!(check(flat, &[[0, 1, 2], [0, 2, 3]]), MeshError::DegenerateCell { cell: c, .. } if c == cell(1)));
    let told = check(vec![[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [0.2, 0.9]], &[[0, 1, 2], [0, 1, 3]]);
    assert!(matches!(told, MeshError::OverlappingCells { .. }));
    let mut twice = corners();
    twice.push([1.0, 1.0]);
    assert!(matches!(check(twice, &[[0, 1, 2], [0, 4, 3]]), MeshError::RepeatedPoint { first: 2, second: 4, .. }));
    let mut infinite = corners();
    infinite[1][0] = f64::INFINITY;
    assert!(matches!(check(infinite, &[[0, 1, 2]]), MeshError::NotFinite { index: 1, .. }));
    assert!(matches!(check(corners(), &[[0, 1, 9]]), MeshError::VertexOutOfRange { index: 9, count: 4, .. }));
    assert!(matches!(check(corners(), &[[0, 1, 2]]), MeshError::UnusedVertex { .. }));
}

#[test]
fn names_that_do_not_exist() {
    let told = mended(stated().conductivity("plat", 2.0).solve().unwrap_err());
    assert!(matches!(told, Error::Mesh(MeshError::UnknownName { what: "region", known, .. }) if known == ["plate"]));
    let told = mended(stated().dirichlet("lid", 2.0).solve().unwrap_err());
    assert!(matches!(told, Error::Mesh(MeshError::UnknownName { what: "side", known, .. }) if known.len() == 4));
    let solution = stated().solve().unwrap();
    assert!(solution.inflow("lid").map_err(mended).is_err());
    assert!(solution.over_region("lid").map_err(mended).is_err());
    let told = mended(stated().dirichlet("left", 1.0).solve().unwrap_err());
    assert!(matches!(told, Error::GivenTwice { name, .. } if name == "left"));
    let bare = Diffusion::on(plate()).dirichlet("left", 0.0);
    assert!(matches!(assembly_error(bare), AssemblyError::RegionWithout { region, .. } if region == "plate"));
    for order in [0, 13] {
        assert!(matches!(mended(stated().order(order).solve().unwrap_err()), Error::Assembly(_)));
    }
}

#[test]
fn coefficients() {
    let problem = || Diffusion::on(plate()).dirichlet("left", 0.0);
    let told = assembly_error(problem().conductivity("plate", |at: &Place<2>| 0.6 - at.x[0]));
    assert!(matches!(told, AssemblyError::NotPositiveDefinite { at, region, .. } if at[0] >= 0.6 && region == "plate"));
    let indefinite = Tensor::symmetric([[1.0, 2.0], [2.0, 1.0]]);
    let told = assembly_error(problem().conductivity("plate", indefinite));
    assert!(matches!(told, AssemblyError::NotPositiveDefinite { smallest, .. } if (smallest + 1.0).abs() < 1e-12));
    let right = |at: &Place<2>| if at.x[0] > 0.9 { f64::NAN } else { 1.0 };
    for (what, faulty) in [
        ("conductivity", problem().conductivity("plate", right)),
        ("source", stated().source("plate", right)),
        ("reaction coefficient", stated().reaction("plate", right)),
        ("prescribed value", stated().dirichlet("top", right)),
        ("inflow", stated().neumann("top", right)),
        ("film coefficient", stated().robin("top", right, 0.0)),
        ("exchange with the surroundings", stated().robin("top", 1.0, right)),
    ] {
        let told = assembly_error(faulty);
        assert!(matches!(&told, AssemblyError::NotFinite { what: w, at, .. } if *w == what && at[0] > 0.9), "{told}");
    }
    let told = assembly_error(stated().robin("top", -3.0, 0.0));
    assert!(matches!(told, AssemblyError::Negative { what: "film coefficient", value: -3.0, at, .. } if at[1] == 1.0));
    let told = assembly_error(stated().reaction("plate", -1.0));
    assert!(matches!(told, AssemblyError::Negative { what: "reaction coefficient", .. }));
}

#[test]
fn parts_that_nothing_holds() {
    let bare = || Diffusion::on(plate()).conductivity("plate", 1.0);
    for floating in [bare(), bare().neumann("left", 1.0), bare().robin("left", 0.0, 5.0), bare().reaction("plate", 0.0)]
    {
        assert!(
            matches!(assembly_error(floating), AssemblyError::LevelUndetermined { region, .. } if region == "plate")
        );
    }
    let mut apart = Outline::new();
    apart.region("held", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    apart.region("adrift", rectangle((2.0, 0.0), (3.0, 1.0))).unwrap();
    apart.side("left", between((0.0, 0.0), (0.0, 1.0))).unwrap();
    let problem = Diffusion::on(apart.mesh(0.5).unwrap()).conductivity_everywhere(1.0).dirichlet("left", 0.0);
    assert!(
        matches!(assembly_error(problem), AssemblyError::LevelUndetermined { region, at } if region == "adrift" && at[0] > 2.0)
    );
    let mut split = Outline::new();
    split.region("a", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    split.region("b", rectangle((1.0, 0.0), (2.0, 1.0))).unwrap();
    split.side("between", between((1.0, 0.0), (1.0, 1.0))).unwrap();
    let problem = Diffusion::on(split.mesh(0.5).unwrap()).conductivity_everywhere(1.0).dirichlet("between", 0.0);
    assert!(
        matches!(assembly_error(problem), AssemblyError::InnerCondition { name, at } if name == "between" && at[0] == 1.0)
    );
}

#[test]
fn goals_and_questions() {
    for value in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        for tolerance in [Tolerance::Relative(value), Tolerance::Absolute(value), Tolerance::FlowRelative(value)] {
            assert!(matches!(mended(stated().solve_within(tolerance).unwrap_err()), Error::Tolerance { .. }));
        }
    }
    let pursue = |goal: Goal| stated().pursue(&goal, &mut Automatic::default(), &mut Unwatched);
    let goal = Goal::new(Tolerance::Relative(0.1));
    for budget in [Budget::none().unknowns(0), Budget::none().bytes(0), Budget::none().time(Duration::ZERO)] {
        assert!(matches!(mended(pursue(goal.within(budget)).unwrap_err()), Error::EmptyBudget { .. }));
    }
    for share in [0.0, -0.5, 1.5, f64::NAN] {
        assert!(matches!(mended(pursue(goal.marking(share)).unwrap_err()), Error::MarkedShare { .. }));
    }
    let solution = stated().solve().unwrap();
    for x in [[1.5, 0.5], [f64::NAN, 0.5]] {
        assert!(matches!(mended(solution.value(&x).unwrap_err()), Error::Mesh(_)));
        assert!(solution.gradient(&x).map_err(mended).is_err());
    }
    // Intervals that this problem does not have.
    let sourced = stated().source("plate", 1.0).solve().unwrap();
    assert!(matches!(mended(sourced.exchanged_flow().unwrap_err()), Error::NoInterval { .. }));
    assert!(matches!(mended(sourced.load_work().unwrap_err()), Error::NoInterval { .. }));
    let three = stated().dirichlet("top", 7.0).solve().unwrap();
    assert!(matches!(mended(three.exchanged_flow().unwrap_err()), Error::NoInterval { .. }));
}

#[test]
fn endings_keep_the_best_result() {
    let mut outline = Outline::new();
    outline
        .region("l", polygon(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (-1.0, 1.0), (-1.0, -1.0), (0.0, -1.0)]))
        .unwrap();
    outline.side("rim", hypercircle::mesh::rest_of_boundary()).unwrap();
    let problem = Diffusion::on(outline.mesh(0.5).unwrap())
        .conductivity_everywhere(1.0)
        .source_everywhere(1.0)
        .dirichlet("rim", 0.0);
    let goal = Goal::new(Tolerance::Relative(1e-6));
    let ends = [
        (Budget::none().unknowns(500), Limit::Unknowns),
        (Budget::none().bytes(1 << 20), Limit::Bytes),
        (Budget::none().time(Duration::from_millis(1)), Limit::Time),
    ];
    for (budget, limit) in ends {
        let answer = problem.pursue(&goal.within(budget), &mut Automatic::default(), &mut Unwatched).unwrap();
        assert_eq!(answer.ending(), &Ending::OutOfBudget(limit));
        assert!(!answer.is_met() && answer.certificate().unwrap().bound().is_finite());
        assert_eq!(answer.rounds().last().unwrap().unknowns, answer.unknown_count());
        assert!(limit != Limit::Unknowns || answer.unknown_count() <= 500);
    }
    let mut watched = 0;
    let mut stop = |round: &Round| {
        watched += 1;
        if round.number < 3 { Signal::Continue } else { Signal::Stop }
    };
    let answer = problem.pursue(&goal, &mut Automatic::default(), &mut stop).unwrap();
    assert_eq!((answer.ending(), answer.rounds().len(), watched), (&Ending::Cancelled, 3, 3));
    // A solver that gives up later on: the round before is kept.
    let mut small = hypercircle::solve::Direct::within(200_000);
    let answer = problem.pursue(&goal, &mut small, &mut Unwatched).unwrap();
    assert!(matches!(answer.ending(), Ending::SolverFailed(_)) && !answer.rounds().is_empty());
}

/// Singularities so strong that cells reach the resolution of the coordinates, and data that jump: the run ends by itself.
#[test]
fn runs_without_hope_end_with_what_they_have() {
    let mut board = Outline::new();
    for (name, corner) in [("a", (0.0, 0.0)), ("b", (0.5, 0.0)), ("b", (0.0, 0.5)), ("a", (0.5, 0.5))] {
        board.region(name, rectangle(corner, (corner.0 + 0.5, corner.1 + 0.5))).unwrap();
    }
    board.side("left", between((0.0, 0.0), (0.0, 1.0))).unwrap();
    board.side("right", between((1.0, 0.0), (1.0, 1.0))).unwrap();
    let problem = Diffusion::on(board.mesh(0.3).unwrap())
        .conductivity("a", 1.0)
        .conductivity("b", 1e5)
        .dirichlet("left", 0.0)
        .dirichlet("right", 1.0)
        .order(2);
    let answer = problem.solve_within(Tolerance::FlowRelative(1e-3)).unwrap();
    println!("{:?} after {} rounds: {}", answer.ending(), answer.rounds().len(), answer.exchanged_flow().unwrap());
    assert!(matches!(answer.ending(), Ending::Met | Ending::Stuck));
    // The effective conductivity √(k₁ k₂) of the checkerboard (J. B. Keller, J. Math. Phys. 5, 1964).
    assert!(answer.exchanged_flow().unwrap().holds(1e5_f64.sqrt()));

    let jump = stated().dirichlet("top", 20.0).solve_within(Tolerance::Relative(0.1)).unwrap();
    assert_eq!(jump.ending(), &Ending::Stuck);
    assert!((jump.value(&[0.5, 0.9]).unwrap() - 10.0).abs() < 10.0);
}

/// The bound rises while the peak of a closure is not yet seen: no reason to give up.
#[test]
fn a_rising_bound_is_no_end() {
    let peak = |at: &Place<2>| {
        let r2 = (at.x[0] - 0.51).powi(2) + (at.x[1] - 0.117).powi(2);
        4e5 * (1.0 - 1e5 * r2) * (-1e5 * r2).exp()
    };
    let mut problem = Diffusion::on(plate()).conductivity("plate", 1.0).source("plate", peak).order(2);
    for side in ["left", "right", "bottom", "top"] {
        problem = problem.dirichlet(side, 0.0);
    }
    let answer = problem.solve_within(Tolerance::Relative(0.02)).unwrap();
    assert!(answer.is_met(), "{:?} {:?}", answer.ending(), answer.rounds().last());
    let top = answer.extremes().most;
    assert!((top.value - 1.0).abs() < 1e-3 && (top.at[0] - 0.51).abs() < 1e-3, "{top:?}");
}

#[test]
fn extremes_between_nodes_are_found() {
    // u = 100 x (1 − x) + 3: its top lies inside the middle one of three cells, on no node.
    let bar = Diffusion::on(Interval::from_nodes(&[0.0, 0.3, 0.9, 1.0]).mesh().unwrap())
        .conductivity_everywhere(1.0)
        .source_everywhere(200.0)
        .dirichlet("start", 3.0)
        .dirichlet("end", 3.0)
        .order(2)
        .solve()
        .unwrap();
    let top = bar.extremes().most;
    assert!((top.value - 28.0).abs() < 1e-12 && (top.at[0] - 0.5).abs() < 1e-6, "{top:?}");
}

#[test]
fn extremes_of_scale_stay_finite() {
    for (length, k) in [(1e-9, 1e-12), (1e-9, 1e12), (1e9, 1e-12), (1e9, 1e12), (1e-150, 1.0), (1e150, 1.0)] {
        let mesh = Rectangle::new([0.0, 0.0], [length, length], [3, 3]).region("plate").mesh().unwrap();
        let solution = Diffusion::on(mesh)
            .conductivity("plate", k)
            .dirichlet("left", 0.0)
            .robin("right", k / length, 1.0)
            .order(2)
            .solve()
            .unwrap();
        let bound = solution.certificate().unwrap().bound();
        assert!(bound.is_finite() && bound < 1e-6 * solution.energy_norm().unwrap(), "{length} {k}: {bound}");
        assert!((solution.value(&[length, 0.5 * length]).unwrap() - 0.5).abs() < 1e-9);
    }
    // No free unknown at all, a single cell, data that jump.
    let mut held =
        Diffusion::on(Rectangle::new([0.0; 2], [1.0; 2], [1, 1]).mesh().unwrap()).conductivity_everywhere(1.0);
    for side in ["left", "right", "bottom", "top"] {
        held = held.dirichlet(side, 3.0);
    }
    assert!(held.solve().unwrap().certificate().unwrap().bound() < 1e-9);
    let cell = Arrays::new(vec![[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]], &[[0, 1, 2]]).side("s", &[[0, 1]]).mesh().unwrap();
    let single = Diffusion::on(cell).conductivity_everywhere(1.0).source_everywhere(1.0).dirichlet("s", 0.0).solve();
    assert!(single.unwrap().certificate().unwrap().bound().is_finite());
    let jump = stated().dirichlet("top", 20.0).solve().unwrap();
    let certificate = jump.certificate().unwrap();
    assert!(matches!(certificate.guarantee(), Guarantee::None(_)) && certificate.bound().is_infinite());
    assert!(matches!(mended(jump.exchanged_flow().unwrap_err()), Error::NoInterval { .. }));
}
