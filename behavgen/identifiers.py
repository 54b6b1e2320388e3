"""Names that both emitted languages accept for a module or a pin."""

from __future__ import annotations

import re

__all__ = ["SYSTEMVERILOG_KEYWORDS", "VERILOG_A_KEYWORDS", "identifier_fault", "pin_fault"]

_PLAIN = re.compile(r"[A-Za-z_][A-Za-z0-9_]*")
_LONGEST = 100  # leaves room for suffixes in file names, which many systems end at 255 bytes

_SYSTEMVERILOG = """
    accept_on alias always always_comb always_ff always_latch and assert assign assume automatic
    before begin bind bins binsof bit break buf bufif0 bufif1 byte case casex casez cell chandle
    checker class clocking cmos config const constraint context continue cover covergroup
    coverpoint cross deassign default defparam design disable dist do edge else end endcase
    endchecker endclass endclocking endconfig endfunction endgenerate endgroup endinterface
    endmodule endpackage endprimitive endprogram endproperty endsequence endspecify endtable
    endtask enum event eventually expect export extends extern final first_match for force
    foreach forever fork forkjoin function generate genvar global highz0 highz1 if iff ifnone
    ignore_bins illegal_bins implements implies import incdir include initial inout input inside
    instance int integer interconnect interface intersect join join_any join_none large let
    liblist library local localparam logic longint macromodule matches medium modport module
    nand negedge nettype new nexttime nmos nor noshowcancelled not notif0 notif1 null or output
    package packed parameter pmos posedge primitive priority program property protected pull0
    pull1 pulldown pullup pulsestyle_ondetect pulsestyle_onevent pure rand randc randcase
    randsequence rcmos real realtime ref reg reject_on release repeat restrict return rnmos
    rpmos rtran rtranif0 rtranif1 s_always s_eventually s_nexttime s_until s_until_with scalared
    sequence shortint shortreal showcancelled signed small soft solve specify specparam static
    string strong strong0 strong1 struct super supply0 supply1 sync_accept_on sync_reject_on
    table tagged task this throughout time timeprecision timeunit tran tranif0 tranif1 tri tri0
    tri1 triand trior trireg type typedef union unique unique0 unsigned until until_with untyped
    use uwire var vectored virtual void wait wait_order wand weak weak0 weak1 while wildcard
    wire with within wor xnor xor
"""
SYSTEMVERILOG_KEYWORDS = frozenset(_SYSTEMVERILOG.split())
"""IEEE 1800-2017, Annex B, table B.1: 248 words."""

_VERILOG_A = """
    above abs absdelay absdelta abstol ac_stim access acos acosh aliasparam always analog
    analysis and asin asinh assert assign atan atan2 atanh automatic begin branch break buf
    bufif0 bufif1 case casex casez ceil cell cmos config connect connectmodule connectrules
    continue continuous cos cosh cross ddt ddt_nature ddx deassign default defparam design
    disable discipline discrete domain driver_update edge else end endcase endconfig
    endconnectrules enddiscipline endfunction endgenerate endmodule endnature endparamset
    endprimitive endspecify endtable endtask event exclude exp expm1 final_step flicker_noise
    floor flow for force forever fork from function generate genvar ground highz0 highz1 hypot
    idt idt_nature idtmod if ifnone incdir include inf initial initial_step inout input instance
    integer join laplace_nd laplace_np laplace_zd laplace_zp large last_crossing liblist library
    limexp ln ln1p localparam log macromodule max medium merged min module nand nature negedge
    net_resolution nmos noise_table noise_table_log nor noshowcancelled not notif0 notif1 or
    output parameter paramset pmos posedge potential pow primitive pull0 pull1 pulldown pullup
    pulsestyle_ondetect pulsestyle_onevent rcmos real realtime reg release repeat resolveto
    return rnmos rpmos rtran rtranif0 rtranif1 scalared showcancelled signed sin sinh slew small
    specify specparam split sqrt string strong0 strong1 supply0 supply1 table tan tanh task time
    timer tran tranif0 tranif1 transition tri tri0 tri1 triand trior trireg units unsigned use
    uwire vectored wait wand weak0 weak1 while white_noise wire wor wreal xnor xor zi_nd zi_np
    zi_zd zi_zp
"""
VERILOG_A_KEYWORDS = frozenset(_VERILOG_A.split())
"""Verilog-AMS LRM 2023, Annex B, table B.1, and two words only LRM 2.4 reserves."""

_TAKEN = """
    OFFSET_SHIFT_V NOISE_ON MISMATCH_ON MEMORY_ON DELAY_ON SEED TEMPERATURE_C PROCESS
    UNRESOLVED_MODE FORCE_UNRESOLVED_EVERY WARNINGS
    x_cause decision_count overdrive_v delay_s
    V I electrical voltage current
"""
_TAKEN_BY_MODELS = frozenset(_TAKEN.split())
"""Parameters, readable state and disciplines of the emitted modules."""


def identifier_fault(name: str) -> str:
    """Return why `name` cannot name a module in both languages; empty when it can."""
    if not _PLAIN.fullmatch(name):
        return f"'{name}' is no identifier; letters, digits and _, not starting with a digit"
    if len(name) > _LONGEST:
        return f"'{name}' has {len(name)} characters; at most {_LONGEST}"
    if name in SYSTEMVERILOG_KEYWORDS:
        return f"'{name}' is a SystemVerilog keyword; choose another name"
    if name in VERILOG_A_KEYWORDS:
        return f"'{name}' is a Verilog-A keyword; choose another name"
    return ""


def pin_fault(name: str) -> str:
    """Return why `name` cannot name a pin of an emitted module; empty when it can."""
    if name in _TAKEN_BY_MODELS:
        return f"'{name}' is taken by the emitted modules; choose another name"
    return identifier_fault(name)
