/** Whether a box lies whole between two heights of the window; half a pixel of rounding is let pass. */
export const onScreen = (box: { readonly top: number; readonly bottom: number }, fromPx: number, toPx: number): boolean =>
  box.bottom > box.top && box.top >= fromPx - 0.5 && box.bottom <= toPx + 0.5
