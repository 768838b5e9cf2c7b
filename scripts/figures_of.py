"""Print the figures of one run from its summary.json: wall time, ratio, counts per step, memory per face."""

import json
import sys
from pathlib import Path

summary = json.loads(Path(sys.argv[1]).read_text())
steps = summary["steps"]
held = max(summary["faces_held_by_rank"])
phases = ", ".join(f"{name} {max(p.get(name, 0.0) for p in summary['phases']):.1f}" for name in summary["phases"][0])
print(
    f"{summary['case']} on {summary['ranks']} ranks, {summary['subdomains']} subdomains, overlap {summary['overlap']}: "
    f"wall {summary['wall_seconds']:.1f} s, {summary['simulated_over_real']:.0f} x real time, "
    f"products a step and subdomain {summary['products'] / steps / summary['subdomains']:.1f}, "
    f"messages a step and rank {summary['messages'] / steps / summary['ranks']:.1f}, "
    f"bytes a step and rank {summary['bytes_sent'] / steps / summary['ranks']:.0f}, "
    f"peak memory of a rank {summary['peak_memory_bytes'] / 1e6:.0f} MB, "
    f"{summary['peak_memory_bytes'] / held:.0f} bytes a held face "
    f"(interpreter included); largest seconds of a rank by phase: {phases}"
)
