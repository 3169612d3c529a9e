"""Ground motion from point sources in real near-surface ground: 2D P-SV waves by the full momentum equation.

    import groundroll as gr
    scenario = gr.Scenario.load("configs/hammer.toml")
    print(gr.plan(scenario))
    records = gr.run(scenario, out="outputs/hammer")
    records.seismograms["line"].velocity_z        # (receiver, time), m/s, positive downward
"""

from importlib import import_module

_HOME = {
    "Plan": "running.plan",
    "Records": "records",
    "Scenario": "scenario",
    "open_records": "records",
    "plan": "running.plan",
    "run": "running.run",
}
__all__ = sorted(_HOME)


def __getattr__(name: str):
    # Looked up on first use: the command line's help need not wait for numba and matplotlib.
    if name not in _HOME:
        raise AttributeError(f"module 'groundroll' has no attribute {name!r}")
    return getattr(import_module(f"groundroll.{_HOME[name]}"), name)
