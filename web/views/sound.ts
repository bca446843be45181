import type { Priority } from '../../server/core/report.ts'
import { type Call, type Silence, signals, silenced, soundNow } from '../model/alarm-sound.ts'
import { el, say } from './dom.ts'

const loudness = 0.25

/**
 * The alarm sound, made in the page. A browser without Web Audio, or one that keeps the page silent until somebody has touched it, is said so for as long
 * as it lasts: an operator must know that nothing will be heard.
 */
export function soundView(announce: (text: string) => void) {
  const tag = el('span', { class: 'tag', id: 'sound' })
  const silence = el('button', { type: 'button', class: 'small', id: 'silence', text: 'Silence' })
  const test = el('button', { type: 'button', class: 'small', id: 'test-sound', text: 'Test sound' })
  const node = el('div', { class: 'sound row', role: 'group', 'aria-label': 'Alarm sound' }, tag, silence, test)
  let audio: AudioContext | null = null
  let calls: readonly Call[] = []
  let quiet: Silence = null
  let sounding: Priority | null = null
  let timer: ReturnType<typeof setTimeout> | undefined

  const available = (): boolean => audio?.state === 'running'
  function wake(): void {
    if (audio === null) {
      try {
        audio = new AudioContext()
        audio.addEventListener('statechange', show)
      } catch {
        // Lacking altogether, or no device: the tag says so.
      }
    }
    if (audio !== null && audio.state !== 'running') void audio.resume().then(show, show)
    show()
  }

  /** Schedules one signal; returns how long it lasts, s. */
  function strike(priority: Priority, afterS = 0): number {
    const s = signals[priority]
    if (audio === null || !available()) return 0
    for (let i = 0; i < s.strokes; i++) {
      const from = audio.currentTime + afterS + i * (s.strokeS + s.pauseS)
      const tone = audio.createOscillator()
      const gain = audio.createGain()
      tone.type = 'triangle'
      tone.frequency.value = s.hz
      gain.gain.setValueAtTime(0, from)
      gain.gain.linearRampToValueAtTime(loudness, from + 0.015)
      gain.gain.setValueAtTime(loudness, from + s.strokeS - 0.03)
      gain.gain.linearRampToValueAtTime(0, from + s.strokeS)
      tone.connect(gain).connect(audio.destination)
      tone.start(from)
      tone.stop(from + s.strokeS)
    }
    return s.strokes * (s.strokeS + s.pauseS)
  }

  function round(): void {
    clearTimeout(timer)
    timer = undefined
    if (sounding === null) return
    strike(sounding)
    timer = setTimeout(round, 1000 * signals[sounding].everyS)
  }

  function hear(): void {
    const now = soundNow(calls, quiet)
    quiet = now.silence
    const was = sounding
    sounding = now.sounds
    if (sounding !== was) round()
    show()
  }

  function show(): void {
    node.dataset['available'] = String(available())
    node.dataset['sounding'] = sounding ?? 'nothing'
    const text = !available() ? 'SOUND NOT AVAILABLE' : quiet !== null ? 'SILENCED until the next alarm' : 'SOUND ON'
    say(tag, text)
    tag.classList.toggle('inv', !available())
    tag.title = available()
      ? 'Alarms not acknowledged are heard'
      : audio === null
        ? 'This browser makes no sound: alarms are seen, not heard'
        : 'This browser keeps the page silent: press a key or click once in it'
    if (sounding === null || !available()) silence.setAttribute('aria-disabled', 'true')
    else silence.removeAttribute('aria-disabled')
  }

  silence.addEventListener('click', () => {
    if (sounding === null) return
    quiet = silenced(calls)
    announce('sound silenced until the next new alarm; nothing is acknowledged by that')
    hear()
  })
  test.addEventListener('click', () => {
    wake()
    const strikeAll = (): void => {
      let at = 0
      for (const p of ['low', 'medium', 'high'] as const) at += strike(p, at) + 0.5
      announce(
        available() ? 'test: one stroke is low, two are medium, three are high priority' : 'sound is not available in this browser',
      )
    }
    if (audio !== null && !available()) void audio.resume().then(strikeAll, strikeAll)
    else strikeAll()
  })
  for (const type of ['pointerdown', 'keydown'] as const)
    document.addEventListener(type, () => {
      if (!available()) wake()
    })
  wake()

  return {
    node,
    calls(next: readonly Call[]): void {
      calls = next
      hear()
    },
  }
}
export type SoundView = ReturnType<typeof soundView>
