package archetype

type ruleIndex struct{}
