/**
 * What no text of Hoarline may advise: the thirteen classes of the trade, as patterns with the
 * sentences they must refuse and those they must let through.
 *
 * A caution names what not to do, so most classes let a phrase pass after a negation in the same
 * clause. The patterns read English; a catalogue in another language needs patterns of its own.
 */
export type Advice = {
  readonly class: number
  readonly title: string
  readonly patterns: readonly RegExp[]
  /** What makes a match harmless when it stands before it in the clause. */
  readonly excusedBy: RegExp
  /** Clauses that a match may stand in, whatever comes before it. */
  readonly unless?: RegExp
  readonly refused: readonly string[]
  readonly allowed: readonly string[]
}

/** "Do not …", "nobody …", and questions, which advise nothing. */
const negation =
  /\b(do not|don't|does not|did not|is not|are not|must not|may not|cannot|not|never|no|nobody|nothing|neither|nor|without|whether|refuses?|refused|forbids?)\b(?!.*\b(but|just|simply|instead|then)\b)/i

/** A claim is not taken back by "not": only by saying that nobody makes it. */
const notSaid =
  /\b(not|never|nobody|nothing|neither|nor)\s+(to\s+)?(say|says|said|saying|show|shows|shown|claim|claims|means?|promises?|tells?|decides?)\b|\bwhether\b/i

const item = '(it|them|this|that|the \\w+)'

export const neverAdvise: readonly Advice[] = [
  {
    class: 1,
    title: 'warm it and use it; a verdict of fitness',
    patterns: [
      /\b(warm|thaw|heat)\w*\b.{0,40}\b(and|then|to)\b.{0,15}\b(use|sell|serve)\b/i,
      /\bstill (good|usable|fine|okay|ok|safe|effective|potent|fit|saleable)\b/i,
      /\b(safe|fit|good|fine|okay|ok|suitable|cleared|ready)\s+(to|for)\s+(use|sell|serve|sale|inject\w*|drink|eat|administ\w*|release|consumption)\b/i,
      /\b(can|may) (still )?be (used|sold|served|released|consumed|eaten)\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Warm it and use it.',
      'Let it thaw slowly, then sell it.',
      'The vial is still good.',
      'It is safe to use.',
      'The lot may be used after inspection.',
      'Do not wait, just warm it and use it.',
    ],
    allowed: [
      'It does not decide whether a product may be used.',
      'Mark DO NOT USE and list the lots.',
      'Whether it may be released is for QA.',
    ],
  },
  {
    class: 2,
    title: 'shaking, tapping, scratching or seeding to test for ice',
    patterns: [
      /\b(shak\w+|shake|tap|tapping|scratch\w*|flick\w*|knock\w*|jolt\w*|tilt\w*|invert\w*)\b.{0,40}\b(to (see|look|test|check|find|know|learn|start)|for ice|whether|if (it|ice|they))\b/i,
      new RegExp(`\\bseed(ing)? ${item}\\b`, 'i'),
      /\bshake test\b/i,
      /\bstart\b.{0,30}\b(pumps?|agitators?|stirrers?)\b.{0,20}\bto (see|check|test)\b/i,
    ],
    excusedBy: negation,
    unless: /\bshake test\b.*\b(QA|control)\b|\b(QA|control)\b.*\bshake test\b/i,
    refused: [
      'Shake it gently to see if it is frozen.',
      'Tap the glass to test for ice.',
      'Tilt a vial and check whether it flows.',
      'Do a shake test.',
      'Seed the vial with ice.',
      'Start the agitator to check.',
      'Knock it to start ice.',
    ],
    allowed: [
      'Do not shake it to test for ice.',
      'Never knock, tilt or lift it to look.',
      "Leave any shake test to QA's order.",
      'A simulator with the same seed gives the same readings.',
    ],
  },
  {
    class: 3,
    title: 're-freezing, or cooling it back down to save it',
    patterns: [
      /\bre-?freez(e|ing)\b/i,
      /\bfreez(e|ing) (it|them|the \w+) again\b/i,
      /\bcool(ing)? (it|them|the \w+) (back )?down\b/i,
      /\b(put|move|return) (it|them) back (in|into|to) the (freezer|cold)\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Refreeze it at once.',
      'Freeze the vials again overnight.',
      'Cool it back down slowly to save it.',
      'Put it back in the freezer.',
    ],
    allowed: ['Do not re-freeze it to hide the event.', 'Never freeze it again after a thaw.'],
  },
  {
    class: 4,
    title: 'hot water, hair-dryer, microwave, hand-warming, heaters',
    patterns: [
      /\b(hot|warm) water\b/i,
      /\b(hair[- ]?dryer|microwave|heat gun|hot[- ]air)\b/i,
      /\b(warm|hold|rub|roll)\w*\b.{0,25}\b(in|between) (the |your )?(hand|palm)s?\b/i,
      /\bhand[- ]warm/i,
      /\b(put|place|use|set|add|bring)\b.{0,20}\bheaters?\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Stand the bottle in warm water.',
      'Use a hair-dryer on low.',
      'Warm the vial in your hand.',
      'Place a heater in the cabinet.',
    ],
    allowed: ['Do not warm it in the hand.', 'Never use a microwave.'],
  },
  {
    class: 5,
    title: 'discarding before QA decides, or releasing because the reading recovered',
    patterns: [
      /\b(discard|destroy|dispose of|throw (it|them|the \w+) (away|out)|pour (it|them|the \w+) away)\b/i,
      /\b(release|return|put)\b.{0,30}\b(because|as soon as|once|when|after)\b.{0,30}\b(in range|range|recover\w*|reading|normal)\b/i,
      /\bback in range\b.{0,20}\b(so|means|therefore)\b/i,
    ],
    excusedBy: negation,
    unless: /\bonly (after|when|once) QA\b/i,
    refused: [
      'Discard the lot.',
      'Throw it away if in doubt.',
      'Release it once the reading is back in range.',
      'Back in range, so nothing is left to do.',
    ],
    allowed: [
      'Do not discard or release before QA decides.',
      'Do not put it back because the reading recovered.',
      'Destroy only after QA has signed.',
    ],
  },
  {
    class: 6,
    title: 'a home-made allowable time',
    patterns: [
      /\b(under|below|up to|less than|within|at most|no more than|not more than|for)\s+\d+\s*(s|min|h|d|seconds?|minutes?|hours?|days?)\b.{0,40}\b(fine|ok|okay|allowed|acceptable|harmless|tolerable|permitted|no problem|safe|does not matter)\b/i,
      /\b(allowable|acceptable|permitted|safe|harmless) (time|duration|exposure|excursion)s?\b/i,
    ],
    excusedBy: notSaid,
    unless: /\b(no|never a|without an?)( \w+)? (allowable|acceptable|permitted|safe) \w+\b/i,
    refused: [
      'Under 60 min is fine.',
      'Up to 2 hours at −1 °C is acceptable.',
      'The allowable time is one hour.',
      'Not more than 30 minutes, which is harmless.',
    ],
    allowed: [
      'Hoarline has no allowable time of its own.',
      'For 60 min the item was below its line.',
    ],
  },
  {
    class: 7,
    title: 'disabling, delaying or widening an alarm; deleting readings',
    patterns: [
      /\b(disabl|silenc|mut|delay|widen|suppress|defeat|ignor)(e|es|ed|ing|s)?\b.{0,25}\b(alarm|alert|limit)s?\b/i,
      /\b(switch|turn) (off|down) .{0,20}\b(alarm|alert)s?\b/i,
      /\b(raise|lower|loosen|relax|move)\b.{0,20}\blimits?\b/i,
      /\b(delet|eras|remov|overwrit|edit)(e|es|ed|ing|s)?\b.{0,20}\b(readings?|records?|audit)\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Widen the alarm limit to stop the noise.',
      'Silence the alarm for the night.',
      'Turn off the low alarm during defrost.',
      'Delete readings that look wrong.',
      'Lower the limit by 1 K.',
    ],
    allowed: [
      'Do not widen an alarm limit to stop the noise.',
      'Raise the alarm if someone has collapsed.',
      'Readings are never deleted or edited.',
      'Never delete readings.',
    ],
  },
  {
    class: 8,
    title: 'entering an oxygen-deficient or CO₂ space; rescue without breathing apparatus',
    patterns: [
      /\b(enter|go(ing)? in|go(ing)? into|step(ping)? in)\b.{0,60}\b(oxygen|nitrogen|CO₂|CO2|gas|vapou?r|collapsed|dead)\b/i,
      /\b(oxygen|nitrogen|CO₂|CO2|gas|collapsed)\b.{0,60}\b(go in|enter|pull (him|her|them) out|rescue)\b/i,
      /\bhold (your|the) breath\b/i,
      /\brescue (him|her|them|the)\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Go in after the collapsed person.',
      'Enter the nitrogen store briefly.',
      'If the oxygen is low, go in fast.',
      'Hold your breath and close the valve.',
    ],
    allowed: [
      'Do not go in after someone who has collapsed.',
      'Oxygen alarm sounding, or dead: stay out.',
      'Never enter without a working oxygen monitor.',
    ],
  },
  {
    class: 9,
    title: 'opening, venting or bypassing refrigeration, electrical or pressure equipment',
    patterns: [
      /\bvent (it|them)\b/i,
      /\b(open|vent|bypass|bridge|drain|recharge|top(ping)? up|loosen|crack)(s|es|ing)?\b.{0,30}\b(panels?|interlocks?|refrigerant|refrigeration|compressors?|switchboards?|relief|pressure|valves?|breakers?|kegs?)\b/i,
      /\breset\b.{0,20}\bbreakers?\b.{0,30}\b(again|until|twice|second)\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Open the panel and check the fan.',
      'Vent the pressure slowly.',
      'Vent it for a minute.',
      'Bypass the door interlock.',
      'Top up refrigerant.',
      'Reset the breaker again.',
    ],
    allowed: [
      'Do not open panels or bypass interlocks.',
      'Keep pressure relief free.',
      'Reset a breaker once, only if your procedure allows.',
    ],
  },
  {
    class: 10,
    title: 'dose, clinical or revaccination advice; food-safety verdicts',
    patterns: [
      /\b(give|repeat|double|skip|reduce|draw up)\b.{0,20}\bdoses?\b/i,
      /\b(re-?vaccinat\w*|administer\w*|inject\b)/i,
      /\b(fit|unfit|safe|unsafe|good) (to|for) (eat\w*|drink\w*|human)/i,
      /\b(is|are|was|were|be|been|has|have|got|looks?)\s+(spoil(ed|t)|ruined|damaged|unharmed|harmless|harmed|potent|effective|edible|inedible|unusable|usable)\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Give a second dose.',
      'Revaccinate those who had this lot.',
      'The fish is spoiled.',
      'The vaccine is unharmed.',
      'Unfit for human consumption.',
    ],
    allowed: [
      'Hoarline does not say whether a product is harmed or may be used.',
      'A record that nobody says is damaged.',
    ],
  },
  {
    class: 11,
    title: 'a visual check taken as proof of never-frozen',
    patterns: [
      /\b(look\w*|appear\w*|clear|visual\w*|inspect\w*|liquid|no ice (is )?(seen|visible))\b.{0,40}\b(so|means?|proves?|shows?|therefore|confirms?)\b.{0,30}\b(not|never|no|nothing|has)\b.{0,20}\b(froz\w*|freez\w*|ice)\b/i,
      /\bjudge\b.{0,20}\bby (the|its|their) (look|appearance)|\bjudge\b.{0,20}\bby appearance\b/i,
      /\b(look|appearance|visual check|inspection)\b.{0,20}\b(as|is|for) (a )?proof\b/i,
      /\b(was|has|have|is|are) (not|never) (been )?frozen\b.{0,20}\b(because|since|as)\b.{0,30}\b(look\w*|clear|liquid)\b/i,
    ],
    excusedBy: /\b(do not|never)\b|\b(not|nobody) (take|say|read|judge|record)\b/i,
    refused: [
      'It looks clear, so it has never been frozen.',
      'Liquid means that it has not frozen.',
      'It was not frozen, since it looks clear.',
      'Judge it by its look.',
      'A visual check is proof.',
      'No ice is seen: this proves that nothing froze; no ice visible means no ice.',
    ],
    allowed: [
      'Do not take a clear look as proof of anything.',
      'It may look perfect.',
      'No ice was seen: from air alone it cannot be.',
    ],
  },
  {
    class: 12,
    title: 'adding salt or antifreeze, lowering the set-point to finish freezing',
    patterns: [
      /\b(add|pour|mix|stir)(s|ing)?\b.{0,20}\b(salt|alcohol|antifreeze|ethanol|glycol)\b/i,
      /\b(lower|reduce|turn down|drop|cut)(s|ing)?\b.{0,25}\b(set-?point|temperature|thermostat)\b.{0,30}\b(freez\w*|finish|solid)\b/i,
      /\bfinish (the )?freezing\b/i,
    ],
    excusedBy: negation,
    refused: [
      'Add salt to keep it liquid.',
      'Lower the set-point so that it freezes through.',
      'Finish freezing overnight.',
    ],
    allowed: [
      'Do not lower the set-point to finish freezing.',
      'A solution of propylene glycol and salt freezes lower.',
    ],
  },
  {
    class: 13,
    title: 'a likelihood shown as certainty',
    patterns: [
      /\b(will|shall|won't|cannot|can't|can never|is going to|are going to)\s+(not |never |certainly |surely |definitely )?(freeze|turn|nucleate)\b/i,
      /\bno ice (can|will|could|shall) (form|appear|grow)\b/i,
      /\b(is|are) (certain|sure|guaranteed|bound|impossible) (to|that)\b/i,
      /\b(no|zero) (risk|chance) of\b/i,
      /\b(guaranteed?|risk-free)\b/i,
      /\b(100|0) ?% (chance|sure|certain|likely)\b/i,
      /\bchance\b.{0,12}\b(is|of)? ?(0|100) ?%/i,
    ],
    excusedBy: notSaid,
    unless: /\bif .*\bwill (not )?turn\b.*\?/i,
    refused: [
      'It will not freeze.',
      'The vial will freeze within the hour.',
      'There is no risk of ice.',
      'It is bound to turn.',
      'The chance is 0 %.',
      'At this depth it cannot freeze.',
      'No ice can form now.',
    ],
    allowed: [
      'A knock may freeze it at once.',
      'Chance within 8 h: 4…60 %.',
      'Hoarline does not say that it will not freeze.',
    ],
  },
]
