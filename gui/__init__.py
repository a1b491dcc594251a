"""The desktop window (tkinter only); started by `digitise window` or `python -m gui`.

Without tkinter, and tested without a screen:

    state, session      one step of the history, frozen; all that the window holds: undo, edits, what is held
    flow, jobs, worker  open, read, settle a grid, save; the same as the worker is asked for it; its thread
    hand                what the pointer and the arrow keys do, tool by tool
    overlay, places     what lies over the picture, as shapes; where a reason to look has its place
    at_place, colours   the ink at a place; colours that stand off a chart
    frame               the part of the picture that is shown, and its pixels
    specs, keys         the fields as data; every command with its words and its key
    words, found_words  what the library says and found, in the window's words
    level_text, table_text, file_names, samples

Widgets, kept thin:

    start, window       begin; all of it, kept in step
    panes, actions      how it is laid out; what every command does
    chart_view          the picture; sight: loupe; pen: draws shapes; level_editor: types a ring's level
    redraw_view, lists  the reading drawn anew; review_list, table and figures
    fields              the panel; field, told_list: its parts
    place_menu, welcome, pages, dialogs
    theme               colours, fonts, styles
    clipboard, drop     pictures from elsewhere
    sweeper             garbage, collected in our own thread
"""
