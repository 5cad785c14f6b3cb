"""How the what-if panel looks to a room: large type, black and one blue, nothing that looks like a go or no-go."""

from __future__ import annotations

from typing import Final

from briefkit.figures import theme

WHAT_IF_STYLE: Final = (
    "<style>"
    ".briefkit-what-if{width:100%;box-sizing:border-box;padding:.8em 1em}"
    ".briefkit-what-if,.briefkit-what-if .widget-html-content,.briefkit-what-if .jupyter-widgets,"
    ".briefkit-what-if .widget-label,.briefkit-what-if input[type=text]"
    "{font-size:clamp(20px,1.6vw,40px);line-height:1.35}"
    ".briefkit-what-if .widget-html,.briefkit-what-if .widget-html-content"
    "{height:auto;width:100%;max-width:100%;white-space:normal;overflow-wrap:anywhere}"
    ".briefkit-what-if,.briefkit-what-if>*,.briefkit-what-if .side>*{flex-shrink:0}"
    ".briefkit-what-if .screen{flex:1 0 auto;flex-flow:column!important;align-content:flex-start;align-items:stretch}"
    ".briefkit-what-if .side{flex:0 0 auto;min-width:0;padding-right:1.2em}"
    # Where there is room for two columns, what was tried stands under the case's own figures, beside the sliders.
    "@media (min-width:1100px){.briefkit-what-if .screen{display:grid;grid-template:auto 1fr/1fr 1fr}"
    ".briefkit-what-if .screen>:nth-child(1){grid-area:1/1/3/2}.briefkit-what-if .screen>:nth-child(2){grid-area:2/2}"
    ".briefkit-what-if .screen>:nth-child(3){grid-area:1/2}}"
    # In reach however far the case is scrolled.
    f".briefkit-fill .moves{{position:sticky;bottom:-.8em;background:{theme.PAPER};padding:.2em 0 .8em;z-index:1}}"
    ".briefkit-what-if h2{font-size:1em;font-weight:600;margin:0}"
    ".briefkit-what-if h3{font-size:.8em;font-weight:600;margin:.7em 0 0}"
    ".briefkit-what-if p{margin:.15em 0;max-width:40em}"
    ".briefkit-what-if .large{font-size:1.35em;font-weight:600;line-height:1.25}"
    f".briefkit-what-if .computed{{color:{theme.COMPUTED}}}"
    f".briefkit-what-if .small{{font-size:.7em;color:{theme.GREY}}}"
    ".briefkit-what-if .widget-text{height:auto;width:auto;flex:1 1 15em;min-width:0;margin:2px 1em 2px 0}"
    ".briefkit-what-if .side>.widget-text,.briefkit-what-if .moves>.widget-text{flex:0 0 auto}"
    ".briefkit-what-if .widget-text .widget-label{width:auto;min-width:6.5em;height:auto;text-align:left}"
    # The free sliders, under the case: each number a slider and its box.
    ".briefkit-what-if .free-try{margin-top:.3em;padding:.3em 0 0;overflow:visible;"
    f"border-top:1px solid {theme.RULE}}}"
    ".briefkit-what-if .free-try>.widget-hbox{overflow:visible;flex-shrink:0;align-items:center;"
    "flex-flow:row nowrap!important;max-width:42em}"
    ".briefkit-what-if .free-try .widget-hslider{flex:1 1 14em;width:auto!important;min-width:0!important;"
    "height:1.7em;margin-right:.6em}"
    ".briefkit-what-if .free-try .widget-hslider .widget-label{width:11.4em!important;text-align:left;height:auto}"
    ".briefkit-what-if .free-try .widget-text{flex:0 0 6.5em;width:6.5em!important;margin-right:.5em}"
    ".briefkit-what-if .by-qnh .widget-text{flex:1 1 12em;width:auto!important}"
    ".briefkit-what-if .by-qnh .widget-label{width:auto!important;min-width:0!important;margin-right:.5em}"
    f".briefkit-what-if .noUi-handle{{border:2px solid {theme.INK}}}"
    f".briefkit-what-if .noUi-handle:focus{{outline:4px solid {theme.INK};outline-offset:1px}}"
    f".briefkit-what-if input[type=text]{{height:auto;padding:.15em .4em;min-width:0;color:{theme.INK};"
    f"background:{theme.PAPER};border:1px solid {theme.GREY}}}"
    ".briefkit-what-if .jupyter-button{font-size:clamp(16px,1.3vw,28px);height:auto;line-height:1.5;width:auto;"
    f"padding:.1em .8em;margin:3px 8px 3px 0;color:{theme.INK};background:{theme.PAPER};"
    f"border:1px solid {theme.GREY}}}"
    f".briefkit-what-if .jupyter-button:disabled{{color:{theme.GREY};border-color:{theme.RULE};opacity:1}}"
    f".briefkit-what-if .jupyter-button:focus,.briefkit-what-if input:focus{{outline:4px solid {theme.INK};"
    "outline-offset:1px}"
    # Filled or blank it covers menus, code and cell numbers. JupyterLab confines what a cell shows to the cell
    # (contain, and a transform in long notebooks); the confinement is lifted only while the panel fills the window.
    ".briefkit-fill,.briefkit-blank{position:fixed!important;inset:0;z-index:100000;overflow:auto;margin:0;"
    "max-width:none;width:100vw!important;height:100vh!important}"
    ":is(div,main,section):has(.briefkit-fill),:is(div,main,section):has(.briefkit-blank)"
    "{contain:none!important;transform:none!important;filter:none!important;will-change:auto!important;"
    "content-visibility:visible!important;z-index:auto}"
    ":is(.jp-LabShell,#main,#jp-main-content-panel) :has(.briefkit-fill),"
    ":is(.jp-LabShell,#main,#jp-main-content-panel) :has(.briefkit-blank){z-index:100000;overflow:visible!important}"
    ".briefkit-blank{background:#000!important}"
    ".briefkit-blank .screen,.briefkit-blank .buttons .jupyter-button:not(.blanker){display:none!important}"
    f".briefkit-blank .jupyter-widgets,.briefkit-blank .widget-label{{color:#8a8a8a}}"
    ".briefkit-blank input[type=text],.briefkit-blank .jupyter-button"
    "{background:#000!important;color:#8a8a8a;border-color:#3a3a3a}"
    ".briefkit-blank input:focus,.briefkit-blank .jupyter-button:focus{outline:1px solid #8a8a8a}"
    "</style>"
)
