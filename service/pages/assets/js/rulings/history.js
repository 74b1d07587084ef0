// The layouts that were looked at, one after the other: undo goes back, redo forth; a new one ends what could be redone.
export class History {
  #steps;
  #place = 0;

  // `first` is the step that stands at the beginning. A step is whatever its maker says.
  constructor(first) {
    this.#steps = [first];
  }

  get now() {
    return this.#steps[this.#place];
  }

  get canUndo() {
    return this.#place > 0;
  }

  get canRedo() {
    return this.#place + 1 < this.#steps.length;
  }

  add(step) {
    this.#steps = [...this.#steps.slice(0, this.#place + 1), step];
    this.#place += 1;
  }

  undo() {
    if (this.canUndo) this.#place -= 1;
    return this.now;
  }

  redo() {
    if (this.canRedo) this.#place += 1;
    return this.now;
  }
}
