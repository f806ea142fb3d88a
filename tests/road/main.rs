//! The one road: a simulated plant through the real door, the store and all stages.

mod support;

use support::Plantlet;
use washbell::base::HOUR_US;

#[tokio::test]
async fn demo_timing() {
    let end = washbell::base::Instant::parse("2026-11-30T06:00:00Z").unwrap();
    let mut p = Plantlet::demo(end).await;
    let t = std::time::Instant::now();
    p.import_all().await;
    eprintln!("intake {:?}", t.elapsed());
    let t = std::time::Instant::now();
    let worked = p.work().await;
    eprintln!("work {:?} {worked:?}", t.elapsed());
    for s in washbell::work::train_states(&p.store, &p.plant).await.unwrap() {
        let st = s.standing.unwrap();
        eprintln!(
            "{} loss {:?} binding {:?} holds {:?} no_dates {:?} run_days {} verdict {:?} {:?}",
            st.train,
            st.loss.map(|l| l.share),
            st.binding(),
            st.holds[1].held,
            st.no_dates,
            st.run_days,
            st.clean.as_ref().map(|c| (c.verdict, c.restored_share())),
            st.earlier_verdicts
        );
    }
    let _ = HOUR_US;
}
